#include "store/reader.h"

#include <utility>

#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "store/folder.h"
#include "store/queries.h"

namespace drover::store {
namespace {

// All rows of a bound statement, each through `read`.
template <class Row>
absl::StatusOr<std::vector<Row>> all(Statement& rows, absl::StatusOr<Row> (*read)(const Statement&)) {
  std::vector<Row> found;
  absl::Status bad;
  while (bad.ok() && rows.next()) {
    absl::StatusOr<Row> one = read(rows);
    bad = one.status();
    if (one.ok()) found.push_back(*std::move(one));
  }
  DROVER_TRY(rows.end());
  DROVER_TRY(bad);
  return found;
}

absl::StatusOr<OutcomeRow> read_outcome(const Statement& row) {
  OutcomeRow outcome;
  outcome.position = row.integer(0);
  outcome.ask = row.integer(1);
  outcome.candidate = row.integer(2);
  outcome.point = row.bytes(3);
  DROVER_TRY(parse(row, 4, outcome.score));
  return outcome;
}

template <class Row>
std::optional<Row> first(std::vector<Row> rows) {
  if (rows.empty()) return std::nullopt;
  return std::move(rows.front());
}

}  // namespace

absl::StatusOr<std::unique_ptr<Reader>> Reader::open(const std::string& folder, const std::string& vfs) {
  std::unique_ptr<Reader> reader(new Reader);
  DROVER_ASSIGN(reader->connection_,
                Connection::open(absl::StrCat(folder, "/", kDatabaseFile), Connection::Kind::kReader, vfs));
  reader->sql_ = std::make_unique<Prepared>(*reader->connection_);
  return reader;
}

absl::Status Reader::begin_snapshot() { return (*sql_)["BEGIN"].run(); }

void Reader::end_snapshot() {
  if (connection_->in_transaction()) static_cast<void>((*sql_)["COMMIT"].run());
}

absl::StatusOr<SearchRow> Reader::search(std::int64_t study) {
  DROVER_ASSIGN(const std::optional<StudyRow> row, study_by_id(*sql_, study));
  if (!row) return absl::NotFoundError(absl::StrCat("no study ", study));
  SearchRow search{.spec = row->spec,
                   .codes = {},
                   .cells = row->cells,
                   .absorbed_through = row->absorbed,
                   .asked = row->asked,
                   .state = {}};
  DROVER_ASSIGN(search.codes, codes_of(*sql_, study));
  Statement& state = (*sql_)["SELECT bytes FROM search_state WHERE study = ?1"];
  if (state.bind(1, study).next()) search.state = state.bytes(0);
  DROVER_TRY(state.end());
  return search;
}

absl::StatusOr<std::vector<OutcomeRow>> Reader::outcomes(std::int64_t study, std::int64_t after, int limit) {
  Statement& rows = (*sql_)[R"sql(
      SELECT l.position, l.ask, l.candidate, c.point, c.score
      FROM learned AS l JOIN candidate AS c ON c.study = l.study AND c.number = l.candidate
      WHERE l.study = ?1 AND l.position > ?2 ORDER BY l.position LIMIT ?3)sql"];
  rows.bind(1, study).bind(2, after).bind(3, std::int64_t{limit});
  return all<OutcomeRow>(rows, read_outcome);
}

absl::StatusOr<std::optional<StudyRow>> Reader::study(const std::string& name) {
  Statement& row = (*sql_)["SELECT id FROM study WHERE name = ?1"];
  const std::int64_t id = row.bind(1, name).next() ? row.integer(0) : 0;
  DROVER_TRY(row.end());
  if (id == 0) return std::nullopt;
  return study_by_id(*sql_, id);
}

absl::StatusOr<std::vector<StudyRow>> Reader::studies(const std::string& after, int limit) {
  Statement& rows = (*sql_)[absl::StrCat("SELECT ", study_columns(),
                                         " FROM study AS s JOIN search_state AS q ON q.study = s.id "
                                         "WHERE s.name > ?1 ORDER BY s.name LIMIT ?2")];
  rows.bind(1, after).bind(2, std::int64_t{limit});
  return all<StudyRow>(rows, read_study);
}

absl::StatusOr<std::vector<std::string>> Reader::study_names() {
  std::vector<std::string> names;
  Statement& rows = (*sql_)["SELECT name FROM study ORDER BY name"];
  while (rows.next()) names.push_back(rows.text(0));
  DROVER_TRY(rows.end());
  return names;
}

absl::StatusOr<std::vector<v1::CodeDefinition>> Reader::codes(std::int64_t study) { return codes_of(*sql_, study); }

absl::StatusOr<std::vector<study::Cell>> Reader::cells(std::int64_t study) { return cells_of(*sql_, study); }

absl::StatusOr<std::map<std::string, std::int64_t>> Reader::open_counts(std::int64_t study) {
  // A run is what its newest attempt is that has not been given up; without one it waits.
  Statement& rows = (*sql_)[R"sql(
      SELECT CASE r.life WHEN 'set_aside' THEN 'set_aside'
                         ELSE coalesce((SELECT a.state FROM attempt AS a
                                        WHERE a.run = r.id AND a.released = 0
                                          AND a.state IN ('granted', 'begun', 'parked', 'stopping')
                                        ORDER BY a.fence DESC LIMIT 1), 'waiting') END AS state,
             count(*)
      FROM run AS r WHERE r.study = ?1 AND r.life IN ('open', 'set_aside') GROUP BY 1)sql"];
  std::map<std::string, std::int64_t> counts;
  rows.bind(1, study);
  while (rows.next()) counts[rows.text(0)] = rows.integer(1);
  DROVER_TRY(rows.end());
  return counts;
}

absl::StatusOr<std::optional<CandidateRow>> Reader::candidate(std::int64_t study, std::int64_t number) {
  Statement& row = (*sql_)[absl::StrCat("SELECT ", candidate_columns(),
                                        " FROM candidate AS c WHERE c.study = ?1 AND c.number = ?2")];
  row.bind(1, study).bind(2, number);
  DROVER_ASSIGN(std::vector<CandidateRow> rows, all<CandidateRow>(row, read_candidate));
  return first(std::move(rows));
}

absl::StatusOr<std::vector<CandidateRow>> Reader::candidates(std::int64_t study, std::int64_t after, int limit) {
  Statement& rows = (*sql_)[absl::StrCat("SELECT ", candidate_columns(),
                                         " FROM candidate AS c WHERE c.study = ?1 AND c.number > ?2 "
                                         "ORDER BY c.number LIMIT ?3")];
  rows.bind(1, study).bind(2, after).bind(3, std::int64_t{limit});
  return all<CandidateRow>(rows, read_candidate);
}

absl::StatusOr<std::vector<RunRow>> Reader::read_runs(Statement& rows) {
  std::vector<RunRow> runs;
  while (rows.next()) runs.push_back(read_run(rows));
  DROVER_TRY(rows.end());
  Statement& open = (*sql_)[absl::StrCat("SELECT ", attempt_columns(),
                                         " FROM attempt AS a WHERE a.run = ?1 "
                                         "AND a.state IN ('granted', 'begun', 'parked', 'stopping') ORDER BY a.fence")];
  for (RunRow& run : runs) {
    if (run.life == "open" || run.life == "set_aside") {
      DROVER_ASSIGN(run.attempts, all<AttemptRow>(open.bind(1, run.id), read_attempt));
    }
    if (run.attempts.empty()) DROVER_TRY(add_telling_attempt(*sql_, run));
  }
  return runs;
}

absl::StatusOr<std::vector<RunRow>> Reader::runs(std::int64_t study, std::int64_t after, int limit) {
  Statement& rows = (*sql_)[absl::StrCat(
      "SELECT ", run_columns(), " FROM run AS r WHERE r.study = ?1 AND r.number > ?2 ORDER BY r.number LIMIT ?3")];
  return read_runs(rows.bind(1, study).bind(2, after).bind(3, std::int64_t{limit}));
}

absl::StatusOr<std::vector<RunRow>> Reader::open_runs(std::int64_t study, std::int64_t after, int limit) {
  // Numbers of a study's runs grow with their ids, so the index of open runs gives their order.
  Statement& rows = (*sql_)[absl::StrCat("SELECT ", run_columns(),
                                         " FROM run AS r WHERE r.study = ?1 AND r.life IN ('open', 'set_aside') "
                                         "AND r.number > ?2 ORDER BY r.id LIMIT ?3")];
  return read_runs(rows.bind(1, study).bind(2, after).bind(3, std::int64_t{limit}));
}

absl::StatusOr<std::vector<RunRow>> Reader::runs_of(std::int64_t study, std::int64_t candidate) {
  Statement& rows = (*sql_)[absl::StrCat("SELECT ", run_columns(),
                                         " FROM run AS r WHERE r.study = ?1 AND r.candidate = ?2 "
                                         "ORDER BY r.condition, r.replicate, r.study_code")];
  return read_runs(rows.bind(1, study).bind(2, candidate));
}

absl::StatusOr<std::int64_t> Reader::attempts(std::int64_t run) {
  Statement& row = (*sql_)["SELECT count(*) FROM attempt WHERE run = ?1"];
  const std::int64_t count = row.bind(1, run).next() ? row.integer(0) : 0;
  DROVER_TRY(row.end());
  return count;
}

}  // namespace drover::store
