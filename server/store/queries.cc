#include "store/queries.h"

#include "absl/strings/str_cat.h"
#include "status/try.h"

namespace drover::store {

absl::Status parse(const Statement& row, int column, google::protobuf::MessageLite& message) {
  if (message.ParseFromString(row.bytes(column))) return absl::OkStatus();
  return absl::DataLossError(absl::StrCat("a stored ", message.GetTypeName(), " cannot be read: the file is damaged"));
}

std::string study_columns() {
  return "s.id, s.name, s.owner, s.state, s.reason, s.sentence, s.revision, s.spec, s.look_ahead, s.candidates, "
         "s.asked, s.runs, s.evaluated, s.failed, s.withdrawn, s.learned, s.lost, s.wall_us, s.best, s.create_us, "
         "s.end_us, q.absorbed_through, q.sentence, q.swarm_low, q.swarm_high";
}

absl::StatusOr<StudyRow> read_study(const Statement& row) {
  StudyRow study;
  study.id = row.integer(0);
  study.name = row.text(1);
  study.owner = row.text(2);
  study.state = static_cast<v1::StudyState>(row.integer(3));
  study.reason = static_cast<v1::StopReason>(row.integer(4));
  study.sentence = row.text(5);
  study.revision = row.integer(6);
  DROVER_TRY(parse(row, 7, study.spec));
  study.look_ahead = row.integer(8);
  study.candidates = row.integer(9);
  study.asked = row.integer(10);
  study.runs = row.integer(11);
  study.evaluated = row.integer(12);
  study.failed = row.integer(13);
  study.withdrawn = row.integer(14);
  study.learned = row.integer(15);
  study.lost = row.integer(16);
  study.wall_us = row.integer(17);
  study.best = row.integer(18);
  study.create_us = row.integer(19);
  study.end_us = row.integer(20);
  study.absorbed = row.integer(21);
  // While it asks, what the method says of itself; else why it does not.
  if (study.state == v1::STUDY_STATE_ACTIVE) study.sentence = row.text(22);
  study.swarm_low = row.bytes(23);
  study.swarm_high = row.bytes(24);
  return study;
}

absl::StatusOr<std::vector<study::Cell>> cells_of(Prepared& sql, std::int64_t study) {
  std::vector<study::Cell> cells;
  Statement& rows = sql[R"sql(SELECT nth, "values", weight FROM condition WHERE study = ?1 ORDER BY nth)sql"];
  rows.bind(1, study);
  while (rows.next()) {
    study::Cell& cell = cells.emplace_back();
    cell.set_condition(static_cast<std::int32_t>(rows.integer(0)));
    cell.set_values(rows.bytes(1));
    cell.set_weight(rows.bytes(2));
  }
  DROVER_TRY(rows.end());
  return cells;
}

absl::StatusOr<std::optional<StudyRow>> study_by_id(Prepared& sql, std::int64_t study) {
  Statement& row = sql[absl::StrCat("SELECT ", study_columns(),
                                    " FROM study AS s JOIN search_state AS q ON q.study = s.id WHERE s.id = ?1")];
  std::optional<StudyRow> found;
  absl::Status bad;
  if (row.bind(1, study).next()) {
    absl::StatusOr<StudyRow> read = read_study(row);
    bad = read.status();
    if (read.ok()) found = *std::move(read);
  }
  DROVER_TRY(row.end());
  DROVER_TRY(bad);
  if (found) {
    DROVER_ASSIGN(found->cells, cells_of(sql, study));
  }
  return found;
}

std::string candidate_columns() {
  return R"sql(c.number, c.origin, c.point, c."values", c.runs, c.ended, c.score,
               coalesce((SELECT a.number FROM ask AS a WHERE a.study = c.study AND a.candidate = c.number), 0))sql";
}

absl::StatusOr<CandidateRow> read_candidate(const Statement& row) {
  CandidateRow candidate;
  candidate.number = row.integer(0);
  candidate.origin = static_cast<v1::Origin>(row.integer(1));
  candidate.point = row.bytes(2);
  candidate.values = row.bytes(3);
  candidate.runs = static_cast<int>(row.integer(4));
  candidate.ended = static_cast<int>(row.integer(5));
  if (!row.null(6)) DROVER_TRY(parse(row, 6, candidate.score.emplace()));
  candidate.ask = row.integer(7);
  return candidate;
}

std::string run_columns() {
  return "r.id, r.study, r.number, r.candidate, r.condition, r.replicate, r.study_code, r.input_digest, r.life, "
         "r.fence, r.settling, r.reason";
}

RunRow read_run(const Statement& row) {
  RunRow run;
  run.id = row.integer(0);
  run.study = row.integer(1);
  run.number = row.integer(2);
  run.candidate = row.integer(3);
  run.condition = static_cast<std::int32_t>(row.integer(4));
  run.replicate = static_cast<std::int32_t>(row.integer(5));
  run.code = static_cast<std::int32_t>(row.integer(6));
  run.input_digest = row.bytes(7);
  run.life = row.text(8);
  run.fence = row.integer(9);
  run.settling = row.integer(10);
  run.reason = row.text(11);
  return run;
}

std::string attempt_columns() {
  return "a.fence, a.session, a.worker, a.state, a.released, a.abnormal, a.reason, a.report";
}

absl::StatusOr<AttemptRow> read_attempt(const Statement& row) {
  AttemptRow attempt;
  attempt.fence = row.integer(0);
  attempt.session = row.integer(1);
  attempt.worker = row.text(2);
  attempt.state = row.text(3);
  attempt.released = row.integer(4) != 0;
  attempt.abnormal = row.integer(5) != 0;
  attempt.reason = row.text(6);
  if (!row.null(7)) DROVER_TRY(parse(row, 7, attempt.report.emplace()));
  return attempt;
}

absl::Status add_telling_attempt(Prepared& sql, RunRow& run) {
  const std::int64_t fence = run.settling > 0 ? run.settling : run.fence;
  if (fence == 0) return absl::OkStatus();
  Statement& row = sql[absl::StrCat("SELECT ", attempt_columns(), " FROM attempt AS a WHERE run = ?1 AND fence = ?2")];
  absl::Status bad;
  if (row.bind(1, run.id).bind(2, fence).next()) {
    absl::StatusOr<AttemptRow> read = read_attempt(row);
    bad = read.status();
    if (read.ok()) run.attempts.push_back(*std::move(read));
  }
  DROVER_TRY(row.end());
  return bad;
}

absl::StatusOr<std::vector<v1::CodeDefinition>> codes_of(Prepared& sql, std::int64_t study) {
  std::vector<v1::CodeDefinition> codes;
  Statement& rows = sql[R"sql(
      SELECT d.bytes FROM study_code AS c JOIN code_definition AS d ON d.digest = c.digest
      WHERE c.study = ?1 ORDER BY c.nth)sql"];
  rows.bind(1, study);
  absl::Status bad;
  while (bad.ok() && rows.next()) bad = parse(rows, 0, codes.emplace_back());
  DROVER_TRY(rows.end());
  DROVER_TRY(bad);
  return codes;
}

}  // namespace drover::store
