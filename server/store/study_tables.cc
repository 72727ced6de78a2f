// Events of studies: what was started, changed, asked and learned.
#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "store/chain.h"
#include "store/tables.h"
#include "study/bytes.h"

namespace drover::store {
namespace {

using study::Event;

absl::Status start(Prepared& sql, const Event& event, std::int64_t number) {
  const study::StudyStarted& started = event.study_started();
  const v1::StudySpec& spec = started.spec();
  Statement& insert = sql[R"sql(
      INSERT INTO study(id, name, owner, state, revision, priority, learn_order, look_ahead, method, method_revision,
                        fingerprint, spec, create_us)
      VALUES (?1, ?2, ?3, 1, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12))sql"];
  insert.bind(1, started.study()).bind(2, spec.name()).bind(3, started.owner()).bind(4, number);
  insert.bind(5, std::int64_t{spec.priority()}).bind(6, std::int64_t{spec.search().order()});
  insert.bind(7, started.window()).bind(8, spec.search().method()).bind(9, std::int64_t{started.method_revision()});
  insert.bind(10, started.fingerprint()).bind_bytes(11, canonical(spec)).bind(12, event.time_us());
  DROVER_TRY(insert.run());
  for (const study::StudyCode& code : started.codes()) {
    Statement& row = sql["INSERT INTO study_code(study, nth, role, digest, cost) VALUES (?1, ?2, ?3, ?4, ?5)"];
    row.bind(1, started.study()).bind(2, std::int64_t{code.index()}).bind(3, std::int64_t{code.role()});
    DROVER_TRY(row.bind(4, code.digest()).bind_bytes(5, study::pack_double(code.cost())).run());
  }
  for (const study::Cell& cell : started.cells()) {
    Statement& row = sql[R"sql(INSERT INTO condition(study, nth, "values", weight) VALUES (?1, ?2, ?3, ?4))sql"];
    row.bind(1, started.study()).bind(2, std::int64_t{cell.condition()});
    DROVER_TRY(row.bind_bytes(3, cell.values()).bind_bytes(4, cell.weight()).run());
  }
  return sql["INSERT INTO search_state(study) VALUES (?1)"].bind(1, started.study()).run();
}

absl::Status change(Prepared& sql, const Event& event) {
  const study::StudyChanged& changed = event.study_changed();
  const bool over = changed.state() == v1::STUDY_STATE_FINISHED || changed.state() == v1::STUDY_STATE_STOPPED;
  Statement& update = sql["UPDATE study SET state = ?1, reason = ?2, sentence = ?3, end_us = ?4 WHERE id = ?5"];
  update.bind(1, std::int64_t{changed.state()}).bind(2, std::int64_t{changed.reason()}).bind(3, changed.sentence());
  return update.bind(4, over ? event.time_us() : 0).bind(5, event.study()).run_on_one("a study's state");
}

absl::Status issue_run(Prepared& sql, std::int64_t study, std::int64_t candidate, const study::IssuedRun& run) {
  Statement& insert = sql[R"sql(
      INSERT INTO run(id, study, number, candidate, condition, replicate, study_code, input_digest)
      VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8))sql"];
  insert.bind(1, run.run()).bind(2, study).bind(3, run.number()).bind(4, candidate);
  insert.bind(5, std::int64_t{run.condition()}).bind(6, std::int64_t{run.replicate()});
  return insert.bind(7, std::int64_t{run.code()}).bind_bytes(8, run.input_digest()).run();
}

absl::Status issue_ask(Prepared& sql, std::int64_t study, const study::IssuedAsk& ask) {
  Statement& candidate = sql[R"sql(
      INSERT INTO candidate(study, number, origin, point, "values", digest, runs)
      VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7))sql"];
  candidate.bind(1, study).bind(2, ask.candidate()).bind(3, std::int64_t{ask.origin()}).bind_bytes(4, ask.point());
  candidate.bind_bytes(5, ask.values()).bind_bytes(6, ask.digest());
  DROVER_TRY(candidate.bind(7, std::int64_t{ask.runs_size()}).run());
  if (ask.ask() > 0) {
    Statement& row = sql[R"sql(
        INSERT INTO ask(study, number, candidate, purpose, learned_through) VALUES (?1, ?2, ?3, ?4, ?5))sql"];
    row.bind(1, study).bind(2, ask.ask()).bind(3, ask.candidate()).bind(4, ask.purpose());
    DROVER_TRY(row.bind(5, ask.learned_through()).run());
  }
  for (const study::IssuedRun& run : ask.runs()) DROVER_TRY(issue_run(sql, study, ask.candidate(), run));
  Statement& count = sql[R"sql(
      UPDATE study SET candidates = candidates + 1, asked = asked + ?1, runs = runs + ?2 WHERE id = ?3)sql"];
  return count.bind(1, std::int64_t{ask.ask() > 0}).bind(2, std::int64_t{ask.runs_size()}).bind(3, study)
      .run_on_one("a study's counts");
}

absl::Status issue(Prepared& sql, const Event& event) {
  const study::AsksIssued& issued = event.asks_issued();
  for (const study::IssuedAsk& ask : issued.asks()) DROVER_TRY(issue_ask(sql, event.study(), ask));
  Statement& state = sql[R"sql(
      UPDATE search_state SET absorbed_through = ?1, bytes = ?2, sentence = ?3, swarm_low = ?4, swarm_high = ?5
      WHERE study = ?6 AND absorbed_through <= ?1)sql"];
  state.bind(1, issued.absorbed_through()).bind_bytes(2, issued.search_state()).bind(3, issued.sentence());
  state.bind_bytes(4, issued.swarm_low()).bind_bytes(5, issued.swarm_high()).bind(6, event.study());
  return state.run_on_one("a search's state");
}

absl::Status learn(Prepared& sql, const Event& event) {
  const study::CandidateLearned& learned = event.candidate_learned();
  Statement& score = sql[R"sql(
      UPDATE candidate SET score = ?1 WHERE study = ?2 AND number = ?3 AND score IS NULL AND ended = runs)sql"];
  score.bind_bytes(1, canonical(learned.score())).bind(2, event.study()).bind(3, learned.candidate());
  DROVER_TRY(score.run_on_one("a candidate's score"));
  Statement& row = sql[R"sql(
      INSERT INTO learned(study, position, candidate, ask)
      VALUES (?1, ?2, ?3, coalesce((SELECT number FROM ask WHERE study = ?1 AND candidate = ?3), 0)))sql"];
  DROVER_TRY(row.bind(1, event.study()).bind(2, learned.position()).bind(3, learned.candidate()).run());
  Statement& count = sql[R"sql(
      UPDATE study SET learned = learned + 1, best = CASE WHEN ?1 THEN ?2 ELSE best END WHERE id = ?3)sql"];
  return count.bind(1, std::int64_t{learned.leads()}).bind(2, learned.candidate()).bind(3, event.study())
      .run_on_one("a study's counts");
}

}  // namespace

absl::Status apply_to_studies(Prepared& sql, const Event& event, std::int64_t number) {
  switch (event.kind_case()) {
    case Event::kStudyStarted:
      return start(sql, event, number);
    case Event::kStudyChanged:
      return change(sql, event);
    case Event::kAsksIssued:
      return issue(sql, event);
    case Event::kCandidateLearned:
      return learn(sql, event);
    default:
      return absl::InternalError(absl::StrCat("event kind ", event.kind_case(), " is none of a study"));
  }
}

}  // namespace drover::store
