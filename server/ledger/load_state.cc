// The memory of a coordinator that starts, or that lost a transaction: read from the store.
#include <utility>

#include "absl/strings/str_cat.h"
#include "ledger/state.h"
#include "status/try.h"
#include "study/bytes.h"

namespace drover::ledger {
namespace {

dispatch::Session session_of(const study::SessionOpened& opened, absl::Duration now) {
  return {.id = opened.session(),
          .token = opened.token(),
          .worker = opened.worker(),
          .host = opened.host(),
          .version = opened.version(),
          .incarnation = opened.incarnation(),
          .slots = opened.slots(),
          .code_digests = {opened.code_digests().begin(), opened.code_digests().end()},
          .tags = {opened.tags().begin(), opened.tags().end()},
          .fleet_job = opened.fleet_job(),
          .heard = now};
}

std::optional<dispatch::Attempt::State> open_state(const std::string& state) {
  using State = dispatch::Attempt::State;
  if (state == "granted") return State::kGranted;
  if (state == "begun") return State::kBegun;
  if (state == "parked") return State::kParked;
  if (state == "stopping") return State::kStopping;
  return std::nullopt;
}

dispatch::Run run_of(const store::RunRow& row, absl::Duration now) {
  dispatch::Run run{.id = row.id,
                    .study = row.study,
                    .number = row.number,
                    .candidate = row.candidate,
                    .condition = row.condition,
                    .replicate = row.replicate,
                    .code = row.code,
                    .input_digest = row.input_digest,
                    .fence = row.fence,
                    .set_aside = row.life == "set_aside",
                    .closed = row.life == "settled" || row.life == "withdrawn"};
  for (const store::AttemptRow& attempt : row.attempts) {
    if (attempt.abnormal && attempt.state == "lost") run.abnormal_on.insert(attempt.worker);
    const std::optional<dispatch::Attempt::State> state = open_state(attempt.state);
    if (!state) continue;
    run.attempts[attempt.fence] = {.fence = attempt.fence,
                                   .session = attempt.session,
                                   .worker = attempt.worker,
                                   .state = *state,
                                   .released = attempt.released,
                                   .since = now,
                                   .licences = attempt.licences};
  }
  return run;
}

}  // namespace

absl::StatusOr<std::unique_ptr<State>> State::load(store::Store& store, const dispatch::Times& times,
                                                   absl::Duration now) {
  auto state = std::make_unique<State>(times);
  DROVER_ASSIGN(const store::Store::Numbers numbers, store.numbers());
  state->next_study = numbers.study + 1;
  state->next_run = numbers.run + 1;
  state->next_session = numbers.session + 1;
  DROVER_ASSIGN(const std::vector<v1::CodeDefinition> codes, store.codes());
  for (const v1::CodeDefinition& code : codes) state->add_code(code);
  DROVER_ASSIGN(auto pools, store.licence_pools());
  state->book.set_licences(std::move(pools));
  DROVER_ASSIGN(const std::vector<study::SessionOpened> sessions, store.sessions());
  for (const study::SessionOpened& opened : sessions) state->book.add_session(session_of(opened, now));
  DROVER_ASSIGN(const std::vector<store::StudyRow> studies, store.open_studies());
  for (const store::StudyRow& row : studies) DROVER_TRY(state->load_study(store, row));
  DROVER_TRY(state->load_runs(store, now));
  state->forget_ended();
  return state;
}

absl::Status State::load_study(store::Store& store, const store::StudyRow& row) {
  StudyRecord record;
  record.id = row.id;
  record.name = row.name;
  record.owner = row.owner;
  record.sentence = row.sentence;
  record.spec = row.spec;
  record.state = row.state;
  record.reason = row.reason;
  record.look_ahead = row.look_ahead;
  record.asked = row.asked;
  record.candidates = row.candidates;
  record.runs = row.runs;
  record.used = row.evaluated + row.failed;
  record.learned = row.learned;
  record.absorbed = row.absorbed;
  if (row.best > 0) {
    DROVER_ASSIGN(record.best, store.score(row.id, row.best));
  }
  DROVER_ASSIGN(const std::vector<store::CandidateRow> candidates, store.open_candidates(row.id));
  for (const store::CandidateRow& candidate : candidates) {
    OpenCandidate open{.number = candidate.number, .ask = candidate.ask, .values = {}, .runs = candidate.runs,
                       .ended = candidate.ended, .results = {}};
    DROVER_ASSIGN(open.values, study::unpack_doubles(candidate.values));
    record.open[candidate.number] = std::move(open);
  }
  DROVER_ASSIGN(const std::vector<store::RunRow> settled, store.partial_results(row.id));
  for (const store::RunRow& run : settled) {
    if (run.attempts.empty() || !run.attempts.front().report) {
      return absl::DataLossError(absl::StrCat("run ", run.id, " is settled without a report: the store is damaged"));
    }
    record.open.at(run.candidate).results.push_back({run.condition, run.replicate, *run.attempts.front().report});
  }
  return add_study(std::move(record), row.cells);
}

absl::Status State::load_runs(store::Store& store, absl::Duration now) {
  DROVER_ASSIGN(const std::vector<store::RunRow> runs, store.live_runs());
  for (const store::RunRow& row : runs) {
    if (study(row.study) == nullptr) {
      return absl::DataLossError(absl::StrCat("run ", row.id, " is of no open study: the store is damaged"));
    }
    book.add_run(run_of(row, now));
  }
  return absl::OkStatus();
}

}  // namespace drover::ledger
