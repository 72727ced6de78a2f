// What is wrong with a study file, and where, in the form in which it is shown.
#pragma once

#include <string>
#include <vector>

namespace drover::studyfile {

// A place in a file, both counted from 1; 0: the file as a whole.
struct Place {
  int line = 0;
  int column = 0;
  bool operator==(const Place&) const = default;
};

struct Complaint {
  std::string file;  // as the user named it
  Place place;
  std::string field;    // a path such as "variable[2].low"; may be empty
  std::string text;     // what is wrong, with the user's own words
  std::string advice;   // what to do about it; may be empty
  std::string nearest;  // a known name that may have been meant; may be empty

  // One line without its end: "penstock.toml:14:9: what; what to do". Control characters are shown as escapes.
  std::string line() const;
};

// By place; complaints at one place stay in their order.
void sort_by_place(std::vector<Complaint>& complaints);

}  // namespace drover::studyfile
