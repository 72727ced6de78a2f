// Where in a study file each field of a spec was written.
#pragma once

#include <map>
#include <string>
#include <string_view>

#include "drover/v1/problem.pb.h"
#include "studyfile/complaint.h"

namespace drover::studyfile {

// Paths are those of v1::Problem: "study.code", "variable[2].low", "objective[0].maximise", "variable[2].choices[1]".
class SourceMap {
 public:
  void set(std::string field, Place place) { places_[std::move(field)] = place; }

  // The place of `field`; where the file does not have it, that of the nearest parent that it does have
  // ("variable[2].low" -> "variable[2]" -> "variable"). {0, 0} when there is none.
  Place find(std::string_view field) const;

  // What the coordinator found wrong, at its place in `file`.
  Complaint locate(const v1::Problem& problem, std::string_view file) const;

 private:
  std::map<std::string, Place, std::less<>> places_;
};

}  // namespace drover::studyfile
