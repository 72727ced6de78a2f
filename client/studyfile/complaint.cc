#include "studyfile/complaint.h"

#include <algorithm>
#include <utility>

#include "absl/strings/str_cat.h"
#include "link/text.h"

namespace drover::studyfile {

std::string Complaint::line() const {
  std::string out = file;
  if (place.line > 0) absl::StrAppend(&out, ":", place.line, ":", place.column);
  absl::StrAppend(&out, ": ", text);
  if (!nearest.empty()) {
    absl::StrAppend(&out, "; did you mean \"", nearest, "\"?", advice.empty() ? "" : " ", advice);
  } else if (!advice.empty()) {
    absl::StrAppend(&out, "; ", advice);
  }
  return link::printable(out);
}

void sort_by_place(std::vector<Complaint>& complaints) {
  std::stable_sort(complaints.begin(), complaints.end(), [](const Complaint& a, const Complaint& b) {
    return std::pair(a.place.line, a.place.column) < std::pair(b.place.line, b.place.column);
  });
}

}  // namespace drover::studyfile
