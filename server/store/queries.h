// Questions that the writer and the readers both ask.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "google/protobuf/message_lite.h"
#include "store/connection.h"
#include "store/rows.h"

namespace drover::store {

// DATA_LOSS when the column holds no such message.
absl::Status parse(const Statement& row, int column, google::protobuf::MessageLite& message);

// Of a statement whose columns are study_columns(); without cells.
std::string study_columns();  // of "study AS s JOIN search_state AS q ON q.study = s.id"
absl::StatusOr<StudyRow> read_study(const Statement& row);
absl::StatusOr<std::vector<study::Cell>> cells_of(Prepared& sql, std::int64_t study);
// With its cells.
absl::StatusOr<std::optional<StudyRow>> study_by_id(Prepared& sql, std::int64_t study);

std::string candidate_columns();  // of "candidate AS c"
absl::StatusOr<CandidateRow> read_candidate(const Statement& row);

std::string run_columns();  // of "run AS r"
RunRow read_run(const Statement& row);

std::string attempt_columns();  // of "attempt AS a"
absl::StatusOr<AttemptRow> read_attempt(const Statement& row);
// The attempt that settled the run, or the newest one where there is none.
absl::Status add_telling_attempt(Prepared& sql, RunRow& run);

// Definitions by index of the study's codes.
absl::StatusOr<std::vector<v1::CodeDefinition>> codes_of(Prepared& sql, std::int64_t study);

}  // namespace drover::store
