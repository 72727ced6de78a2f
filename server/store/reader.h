// Reads beside the writer: a connection of its own that can change nothing.
#pragma once

#include <cstdint>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "store/connection.h"
#include "store/rows.h"

namespace drover::store {

// Not thread-safe; several may read at once. Lists are cut at `limit`. Errors: as the store's.
class Reader {
 public:
  static absl::StatusOr<std::unique_ptr<Reader>> open(const std::string& folder, const std::string& vfs = "");

  // Between the two, all questions see one state of the store, that of a commit. Keep it short: the log cannot be cut
  // back meanwhile.
  absl::Status begin_snapshot();
  void end_snapshot();

  // --- of a search ---
  absl::StatusOr<SearchRow> search(std::int64_t study);  // NOT_FOUND
  // What was learned from position `after` + 1 on, by position.
  absl::StatusOr<std::vector<OutcomeRow>> outcomes(std::int64_t study, std::int64_t after, int limit);

  // --- for people ---
  absl::StatusOr<std::optional<StudyRow>> study(const std::string& name);
  absl::StatusOr<std::vector<StudyRow>> studies(const std::string& after, int limit);  // by name
  absl::StatusOr<std::vector<std::string>> study_names();
  absl::StatusOr<std::vector<v1::CodeDefinition>> codes(std::int64_t study);
  absl::StatusOr<std::vector<study::Cell>> cells(std::int64_t study);
  // How many of the study's open runs are waiting, granted, begun, parked, stopping, set_aside (by these names).
  absl::StatusOr<std::map<std::string, std::int64_t>> open_counts(std::int64_t study);
  absl::StatusOr<std::optional<CandidateRow>> candidate(std::int64_t study, std::int64_t number);
  absl::StatusOr<std::vector<CandidateRow>> candidates(std::int64_t study, std::int64_t after, int limit);  // by number
  // Each with its open attempts, or the one that settled it, or the newest.
  absl::StatusOr<std::vector<RunRow>> runs(std::int64_t study, std::int64_t after, int limit);       // by number
  absl::StatusOr<std::vector<RunRow>> open_runs(std::int64_t study, std::int64_t after, int limit);  // by number
  absl::StatusOr<std::vector<RunRow>> runs_of(std::int64_t study, std::int64_t candidate);
  absl::StatusOr<std::int64_t> attempts(std::int64_t run);  // how many there were

 private:
  Reader() = default;
  absl::StatusOr<std::vector<RunRow>> read_runs(Statement& rows);
  std::unique_ptr<Connection> connection_;
  std::unique_ptr<Prepared> sql_;
};

}  // namespace drover::store
