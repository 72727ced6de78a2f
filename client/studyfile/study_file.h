// Reads a study file: TOML as people write it -> v1::StudySpec. docs/study-file.md is the reference of the format.
//
// Strict: unknown keys and tables, wrong types, keys that do not belong to a kind and missing keys are complaints, all
// of them at once. What only the coordinator can judge (bounds against each other, units, names of outputs) is left to
// it; its problems are shown at their places through `places`. Nothing is filled in: what the author left out is unset
// in the spec.
#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "absl/status/statusor.h"
#include "drover/v1/study.pb.h"
#include "studyfile/complaint.h"
#include "studyfile/source_map.h"

namespace drover::studyfile {

inline constexpr std::size_t kLargestFile = 512 * 1024;  // bytes; a spec has to fit into one message

struct StudyFile {
  std::string name;    // of the file, as in complaints
  v1::StudySpec spec;  // of no use when there are complaints
  SourceMap places;
  std::vector<Complaint> complaints;  // by place; empty: the spec can be sent
};

// Pure. `name` is what complaints call the file. With a syntax error there is one complaint, for nothing behind it can
// be read.
StudyFile parse_study_file(std::string_view text, std::string name);

// NOT_FOUND, PERMISSION_DENIED, INVALID_ARGUMENT (a folder; larger than kLargestFile) when the file cannot be read.
absl::StatusOr<StudyFile> read_study_file(const std::string& path);

}  // namespace drover::studyfile
