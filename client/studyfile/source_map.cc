#include "studyfile/source_map.h"

namespace drover::studyfile {
namespace {

// "a[2].b" -> "a[2]" -> "a" -> "".
std::string_view parent(std::string_view field) {
  const std::size_t end = field.find_last_of(".[");
  return end == std::string_view::npos ? std::string_view() : field.substr(0, end);
}

}  // namespace

Place SourceMap::find(std::string_view field) const {
  for (; !field.empty(); field = parent(field)) {
    const auto found = places_.find(field);
    if (found != places_.end()) return found->second;
  }
  return {};
}

Complaint SourceMap::locate(const v1::Problem& problem, std::string_view file) const {
  return {.file = std::string(file),
          .place = find(problem.field()),
          .field = problem.field(),
          .text = problem.text(),
          .advice = problem.advice(),
          .nearest = problem.nearest()};
}

}  // namespace drover::studyfile
