// What requests ask the store, and what a start reads of it: by key and by partial index, never whole tables.
#include <utility>

#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "store/queries.h"
#include "store/store.h"

namespace drover::store {

absl::StatusOr<std::optional<StoredAnswer>> Store::answer_of(const std::string& request_id) {
  Statement& row = (*sql_)[R"sql(
      SELECT r.principal, r.digest, e.bytes FROM request AS r JOIN event AS e ON e.number = r.event WHERE r.id = ?1)sql"];
  std::optional<StoredAnswer> found;
  absl::Status bad;
  if (row.bind(1, request_id).next()) {
    study::Event event;
    bad = parse(row, 2, event);
    found = StoredAnswer{row.text(0), row.bytes(1), event.answered().response()};
  }
  DROVER_TRY(row.end());
  DROVER_TRY(bad);
  return found;
}

absl::StatusOr<bool> Store::has_study(const std::string& name) {
  Statement& row = (*sql_)["SELECT 1 FROM study WHERE name = ?1"];
  const bool found = row.bind(1, name).next();
  DROVER_TRY(row.end());
  return found;
}

absl::StatusOr<std::optional<RunRecord>> Store::find_run(std::int64_t run) {
  Statement& row = (*sql_)[R"sql(
      SELECT r.study, r.input_digest, r.life IN ('settled', 'withdrawn'), a.report
      FROM run AS r LEFT JOIN attempt AS a ON a.run = r.id AND a.fence = r.settling WHERE r.id = ?1)sql"];
  std::optional<RunRecord> found;
  absl::Status bad;
  if (row.bind(1, run).next()) {
    found = RunRecord{
        .study = row.integer(0), .input_digest = row.bytes(1), .closed = row.integer(2) != 0, .settling_report = {}};
    if (!row.null(3)) bad = parse(row, 3, found->settling_report);
  }
  DROVER_TRY(row.end());
  DROVER_TRY(bad);
  return found;
}

absl::StatusOr<std::optional<AttemptRecord>> Store::find_attempt(std::int64_t run, std::int64_t fence) {
  Statement& row = (*sql_)[R"sql(
      SELECT a.worker, a.end_event, e.hash, a.state FROM attempt AS a LEFT JOIN event AS e ON e.number = a.end_event
      WHERE a.run = ?1 AND a.fence = ?2)sql"];
  std::optional<AttemptRecord> found;
  if (row.bind(1, run).bind(2, fence).next()) {
    const std::string state = row.text(3);
    found = AttemptRecord{.worker = row.text(0),
                          .end_event = row.integer(1),
                          .end_hash = row.bytes(2),
                          .has_result = state == "settled" || state == "duplicate",
                          .settled = state == "settled"};
  }
  DROVER_TRY(row.end());
  return found;
}

absl::StatusOr<Store::Numbers> Store::numbers() {
  Numbers numbers;
  DROVER_ASSIGN(numbers.study, connection_->number("SELECT coalesce(max(id), 0) FROM study"));
  DROVER_ASSIGN(numbers.run, connection_->number("SELECT coalesce(max(id), 0) FROM run"));
  DROVER_ASSIGN(numbers.session, connection_->number("SELECT coalesce(max(id), 0) FROM session"));
  return numbers;
}

absl::StatusOr<std::vector<v1::CodeDefinition>> Store::codes() {
  std::vector<v1::CodeDefinition> codes;
  Statement& rows = (*sql_)["SELECT bytes FROM code_definition ORDER BY nth"];
  absl::Status bad;
  while (bad.ok() && rows.next()) bad = parse(rows, 0, codes.emplace_back());
  DROVER_TRY(rows.end());
  DROVER_TRY(bad);
  return codes;
}

absl::StatusOr<std::vector<study::SessionOpened>> Store::sessions() {
  std::vector<study::SessionOpened> sessions;
  Statement& rows = (*sql_)["SELECT opened FROM session WHERE newest = 1 ORDER BY id"];
  absl::Status bad;
  while (bad.ok() && rows.next()) bad = parse(rows, 0, sessions.emplace_back());
  DROVER_TRY(rows.end());
  DROVER_TRY(bad);
  return sessions;
}

absl::StatusOr<std::map<std::string, std::int32_t>> Store::licence_pools() {
  std::map<std::string, std::int32_t> pools;
  Statement& rows = (*sql_)["SELECT name, count FROM licence_pool"];
  while (rows.next()) pools[rows.text(0)] = static_cast<std::int32_t>(rows.integer(1));
  DROVER_TRY(rows.end());
  return pools;
}

absl::StatusOr<std::optional<StudyRow>> Store::study(std::int64_t id) { return study_by_id(*sql_, id); }

absl::StatusOr<std::vector<StudyRow>> Store::open_studies() {
  std::vector<std::int64_t> ids;
  // A study at its end still counts while an attempt of it has not ended: its worker will want an answer.
  Statement& rows = (*sql_)[R"sql(
      SELECT id FROM study WHERE state NOT IN (4, 6)
      UNION
      SELECT r.study FROM attempt AS a JOIN run AS r ON r.id = a.run
      WHERE a.state IN ('granted', 'begun', 'parked', 'stopping')
      ORDER BY 1)sql"];
  while (rows.next()) ids.push_back(rows.integer(0));
  DROVER_TRY(rows.end());
  std::vector<StudyRow> studies;
  for (const std::int64_t id : ids) {
    DROVER_ASSIGN(std::optional<StudyRow> row, study_by_id(*sql_, id));
    if (row) studies.push_back(*std::move(row));
  }
  return studies;
}

absl::StatusOr<std::optional<study::CandidateScore>> Store::score(std::int64_t study, std::int64_t candidate) {
  Statement& row = (*sql_)["SELECT score FROM candidate WHERE study = ?1 AND number = ?2 AND score IS NOT NULL"];
  std::optional<study::CandidateScore> found;
  absl::Status bad;
  if (row.bind(1, study).bind(2, candidate).next()) bad = parse(row, 0, found.emplace());
  DROVER_TRY(row.end());
  DROVER_TRY(bad);
  return found;
}

absl::StatusOr<std::vector<CandidateRow>> Store::open_candidates(std::int64_t study) {
  Statement& rows = (*sql_)[absl::StrCat(
      "SELECT ", candidate_columns(), " FROM candidate AS c WHERE c.study = ?1 AND c.score IS NULL ORDER BY number")];
  std::vector<CandidateRow> candidates;
  rows.bind(1, study);
  absl::Status bad;
  while (bad.ok() && rows.next()) {
    absl::StatusOr<CandidateRow> read = read_candidate(rows);
    bad = read.status();
    if (read.ok()) candidates.push_back(*std::move(read));
  }
  DROVER_TRY(rows.end());
  DROVER_TRY(bad);
  return candidates;
}

absl::StatusOr<std::vector<RunRow>> Store::live_runs() {
  std::map<std::int64_t, RunRow> runs;
  Statement& open = (*sql_)[absl::StrCat("SELECT ", run_columns(),
                                         " FROM run AS r WHERE r.life IN ('open', 'set_aside') "
                                         "UNION SELECT ",
                                         run_columns(),
                                         " FROM attempt AS a JOIN run AS r ON r.id = a.run "
                                         "WHERE a.state IN ('granted', 'begun', 'parked', 'stopping')")];
  while (open.next()) {
    RunRow run = read_run(open);
    runs[run.id] = std::move(run);
  }
  DROVER_TRY(open.end());
  Statement& rows = (*sql_)[absl::StrCat("SELECT ", attempt_columns(),
                                         " FROM attempt AS a WHERE a.run = ?1 AND (a.abnormal = 1 OR a.state IN "
                                         "('granted', 'begun', 'parked', 'stopping'))"
                                         " ORDER BY a.fence")];
  Statement& holds = (*sql_)["SELECT pool, n FROM licence_hold WHERE run = ?1 AND fence = ?2"];
  for (auto& [id, run] : runs) {
    rows.bind(1, id);
    absl::Status bad;
    while (bad.ok() && rows.next()) {
      absl::StatusOr<AttemptRow> read = read_attempt(rows);
      bad = read.status();
      if (read.ok()) run.attempts.push_back(*std::move(read));
    }
    DROVER_TRY(rows.end());
    DROVER_TRY(bad);
    for (AttemptRow& attempt : run.attempts) {
      holds.bind(1, id).bind(2, attempt.fence);
      while (holds.next()) attempt.licences[holds.text(0)] = static_cast<std::int32_t>(holds.integer(1));
      DROVER_TRY(holds.end());
    }
  }
  std::vector<RunRow> all;
  for (auto& [id, run] : runs) all.push_back(std::move(run));
  return all;
}

absl::StatusOr<std::vector<RunRow>> Store::partial_results(std::int64_t study) {
  Statement& rows =
      (*sql_)[absl::StrCat("SELECT ", run_columns(),
                           " FROM candidate AS c JOIN run AS r ON r.study = c.study AND r.candidate = c.number "
                           "WHERE c.study = ?1 AND c.score IS NULL AND r.life = 'settled' ORDER BY r.id")];
  std::vector<RunRow> runs;
  rows.bind(1, study);
  while (rows.next()) runs.push_back(read_run(rows));
  DROVER_TRY(rows.end());
  for (RunRow& run : runs) DROVER_TRY(add_telling_attempt(*sql_, run));
  return runs;
}

}  // namespace drover::store
