// Starting, pausing, resuming and stopping a study, and what its own thread hands in.
#include <algorithm>
#include <map>
#include <memory>
#include <span>
#include <utility>

#include "absl/strings/str_cat.h"
#include "ledger/handlers.h"
#include "search/methods.h"
#include "status/try.h"
#include "study/bytes.h"
#include "study/cells.h"
#include "study/spec_check.h"

namespace drover::ledger {
namespace {

absl::Status change(Turn& turn, std::int64_t study, v1::StudyState state, v1::StopReason reason,
                    const std::string& sentence) {
  study::Event event;
  event.mutable_study_changed()->set_state(state);
  event.mutable_study_changed()->set_reason(reason);
  event.mutable_study_changed()->set_sentence(sentence);
  return turn.emit(study, std::move(event)).status();
}

const char* state_word(v1::StudyState state) {
  switch (state) {
    case v1::STUDY_STATE_ACTIVE:
      return "active";
    case v1::STUDY_STATE_PAUSED:
      return "paused";
    case v1::STUDY_STATE_FINISHING:
      return "finishing";
    case v1::STUDY_STATE_FINISHED:
      return "finished";
    case v1::STUDY_STATE_STOPPING:
      return "stopping";
    case v1::STUDY_STATE_STOPPED:
      return "stopped";
    case v1::STUDY_STATE_FAILED:
      return "failed";
    default:
      return "in no known state";
  }
}

absl::StatusOr<StudyRecord*> open_study(Turn& turn, const std::string& name, const char* what) {
  StudyRecord* const record = turn.state().study(name);
  if (record != nullptr && !record->final()) return record;
  DROVER_ASSIGN(const bool ended, turn.store().has_study(name));
  if (!ended) return refusal(absl::StatusCode::kNotFound, "NO_SUCH_STUDY", absl::StrCat("no study named ", name));
  return refusal(absl::StatusCode::kFailedPrecondition, "STUDY_ENDED",
                 absl::StrCat("study ", name, " has come to its end; there is nothing to ", what));
}

// A run is what its newest attempt is that has not been given up; without one it waits.
void count_open(Turn& turn, std::int64_t study, v1::RunCounts& counts) {
  using State = dispatch::Attempt::State;
  std::map<State, std::int64_t> states;
  std::int64_t waiting = 0, set_aside = 0;
  for (const std::int64_t id : turn.state().book.open_runs(study)) {
    const dispatch::Run& run = *turn.state().book.run(id);
    const auto newest = std::find_if(run.attempts.rbegin(), run.attempts.rend(),
                                     [](const auto& entry) { return !entry.second.released; });
    if (run.set_aside) {
      ++set_aside;
    } else if (newest == run.attempts.rend()) {
      ++waiting;
    } else {
      ++states[newest->second.state];
    }
  }
  counts.set_waiting(waiting);
  counts.set_set_aside(set_aside);
  counts.set_granted(states[State::kGranted]);
  counts.set_begun(states[State::kBegun]);
  counts.set_parked(states[State::kParked]);
  counts.set_stopping(states[State::kStopping]);
}

v1::Study shown(Turn& turn, const StudyRecord& record) {
  v1::Study study;
  study.set_name(record.name);
  study.set_owner(record.owner);
  study.set_state(record.state);
  study.set_reason(record.reason);
  study.set_sentence(record.sentence);
  study.set_revision(turn.store().head().number);
  *study.mutable_spec() = record.spec;
  count_open(turn, record.id, *study.mutable_runs());
  study.set_slots(turn.state().book.slots_for(record.id));
  study.set_workers_busy(turn.state().book.busy_workers(record.id));
  return study;
}

absl::Status cannot(const StudyRecord& record, const char* what) {
  return refusal(absl::StatusCode::kFailedPrecondition, "WRONG_STATE",
                 absl::StrCat("study ", record.name, " cannot be ", what, " while it is ", state_word(record.state)));
}

study::CheckResult check(Turn& turn, const v1::StudySpec& spec, std::uint64_t seed,
                         const std::vector<v1::CodeDefinition>& codes) {
  int slots = 0;
  for (const auto& [id, session] : turn.state().book.sessions()) {
    if (!session.lapsed) slots += session.slots;
  }
  return study::check_spec(spec, {.codes = codes, .slots = slots, .fresh_seed = seed, .now = turn.now().wall});
}

study::StudyStarted started(const v1::StartStudyRequest& request, const study::CheckResult& checked,
                            const StartSettings& settings, std::int64_t id) {
  study::StudyStarted started;
  started.set_study(id);
  started.set_owner(request.owner());
  *started.mutable_spec() = checked.effective;
  for (study::Cell& cell : study::pack_cells(checked.cells)) *started.add_cells() = std::move(cell);
  if (checked.effective.search().order() == v1::ORDER_CANDIDATE)
    started.set_window(checked.effective.search().look_ahead());
  started.set_fingerprint(settings.fingerprint);
  started.set_seed(checked.effective.search().seed());
  for (int i = 0; i < checked.effective.codes_size(); ++i) {
    study::StudyCode& code = *started.add_codes();
    code.set_index(i);
    code.set_role(checked.effective.codes(i).role());
    code.set_digest(checked.effective.codes(i).digest());
    code.set_cost(checked.effective.codes(i).cost());
  }
  return started;
}

// Of the method that will search the study; kept with it, since another revision would ask for other candidates.
absl::StatusOr<int> method_revision(const study::CheckResult& checked, std::span<const v1::CodeDefinition> codes) {
  DROVER_ASSIGN(const std::unique_ptr<study::StudyPlan> plan,
                study::StudyPlan::make(checked.effective, codes, checked.cells));
  DROVER_ASSIGN(const std::unique_ptr<search::SearchMethod> method,
                search::make_method(plan->space(), plan->settings()));
  return method->revision();
}

study::IssuedAsk issue(const StudyRecord& record, const Asked::One& one, std::int64_t ordinal, std::int64_t& next_run,
                       std::int64_t& next_number) {
  study::IssuedAsk issued;
  issued.set_ask(one.ask.number);
  issued.set_candidate(record.candidates + ordinal);
  issued.set_purpose(one.ask.purpose);
  issued.set_learned_through(one.learned_through);
  issued.set_origin(v1::ORIGIN_SEARCH);
  const std::vector<double> values = record.plan->user_values(one.ask.point);
  issued.set_point(study::pack_doubles(one.ask.point));
  issued.set_values(study::pack_doubles(values));
  issued.set_digest(record.plan->candidate_digest(values));
  const v1::CodeUse& code = record.spec.codes(0);
  for (int condition = 0; condition < static_cast<int>(record.plan->cells().size()); ++condition) {
    const std::vector<v1::NamedValue> inputs = record.plan->inputs(values, condition);
    for (int replicate = 0; replicate < record.spec.replicates(); ++replicate) {
      study::IssuedRun& run = *issued.add_runs();
      run.set_run(next_run++);
      run.set_number(next_number++);
      run.set_condition(condition);
      run.set_replicate(replicate);
      run.set_input_digest(study::StudyPlan::input_digest(code.digest(), inputs, replicate));
    }
  }
  return issued;
}

// Ends a run: at once where nobody has it, else once its attempts have ended.
absl::Status stop_run(Turn& turn, std::int64_t study, std::int64_t run) {
  const std::map<std::int64_t, dispatch::Attempt> attempts = turn.state().book.run(run)->attempts;
  if (attempts.empty()) return withdraw(turn, run);
  for (const auto& [fence, attempt] : attempts) {
    if (attempt.state == dispatch::Attempt::State::kStopping) continue;
    study::Event event;
    event.mutable_stop_asked()->set_run(run);
    event.mutable_stop_asked()->set_fence(fence);
    DROVER_TRY(turn.emit(study, std::move(event)).status());
  }
  return absl::OkStatus();
}

}  // namespace

absl::StatusOr<v1::Study> start_study(Turn& turn, const v1::StartStudyRequest& request, const StartSettings& settings) {
  DROVER_ASSIGN(const bool taken, turn.store().has_study(request.spec().name()));
  if (taken) {
    return refusal(
        absl::StatusCode::kAlreadyExists, "STUDY_EXISTS",
        absl::StrCat("there is a study named ", request.spec().name(), " already; give this one another name"));
  }
  const std::vector<v1::CodeDefinition> codes = turn.state().live_codes();
  const study::CheckResult checked = check(turn, request.spec(), settings.fresh_seed, codes);
  if (!checked.problems.empty()) return problems_refusal(checked.problems);
  DROVER_ASSIGN(const int revision, method_revision(checked, codes));
  const std::int64_t id = turn.state().next_study;
  study::Event event;
  *event.mutable_study_started() = started(request, checked, settings, id);
  event.mutable_study_started()->set_method_revision(revision);
  DROVER_TRY(turn.emit(id, std::move(event)).status());
  return shown(turn, *turn.state().study(id));
}

absl::StatusOr<v1::Study> pause_study(Turn& turn, const std::string& name) {
  DROVER_ASSIGN(const StudyRecord* const record, open_study(turn, name, "pause"));
  if (record->state == v1::STUDY_STATE_PAUSED) return shown(turn, *record);
  if (record->state != v1::STUDY_STATE_ACTIVE) return cannot(*record, "paused");
  DROVER_TRY(change(turn, record->id, v1::STUDY_STATE_PAUSED, v1::STOP_REASON_UNSPECIFIED,
                    "paused; what runs goes on, nothing new is granted"));
  return shown(turn, *record);
}

absl::StatusOr<v1::Study> resume_study(Turn& turn, const std::string& name) {
  DROVER_ASSIGN(const StudyRecord* const record, open_study(turn, name, "resume"));
  if (record->state == v1::STUDY_STATE_ACTIVE) return shown(turn, *record);
  const bool can = record->state == v1::STUDY_STATE_PAUSED || record->state == v1::STUDY_STATE_FAILED;
  if (!can) return cannot(*record, "resumed");
  DROVER_TRY(change(turn, record->id, v1::STUDY_STATE_ACTIVE, v1::STOP_REASON_UNSPECIFIED, "resumed"));
  return shown(turn, *record);
}

absl::StatusOr<v1::Study> stop_study(Turn& turn, const std::string& name) {
  DROVER_ASSIGN(const StudyRecord* const record, open_study(turn, name, "stop"));
  if (record->state == v1::STUDY_STATE_STOPPING) return shown(turn, *record);
  const std::int64_t id = record->id;
  DROVER_TRY(change(turn, id, v1::STUDY_STATE_STOPPING, v1::STOP_REASON_PERSON,
                    "stopped by a person; waits for what runs to end"));
  for (const std::int64_t run : turn.state().book.open_runs(id)) DROVER_TRY(stop_run(turn, id, run));
  DROVER_TRY(after_stop(turn, id));
  return shown(turn, *record);
}

absl::Status issue_asks(Turn& turn, const Asked& asked) {
  State& state = turn.state();
  const StudyRecord* const record = state.study(asked.study);
  if (record == nullptr || record->final() || record->absorbed != asked.absorbed_before) {
    return absl::AbortedError("the study has gone on meanwhile");
  }
  study::Standing before = state.standing(*record, turn.now().wall);
  before.absorbed = asked.absorbed_through;
  if (static_cast<std::int64_t>(asked.asks.size()) > study::candidates_wanted(before)) {
    return absl::AbortedError("the study asks for no more candidates");
  }
  study::Event event;
  study::AsksIssued& issued = *event.mutable_asks_issued();
  std::int64_t next_run = state.next_run, next_number = record->runs + 1, ordinal = 0;
  for (const Asked::One& one : asked.asks) {
    *issued.add_asks() = issue(*record, one, ++ordinal, next_run, next_number);
  }
  issued.set_absorbed_through(asked.absorbed_through);
  issued.set_search_state(asked.search_state);
  issued.set_sentence(asked.progress.sentence);
  issued.set_converged(asked.progress.converged);
  issued.set_swarm_low(study::pack_doubles(asked.progress.swarm_low));
  issued.set_swarm_high(study::pack_doubles(asked.progress.swarm_high));
  DROVER_TRY(turn.emit(asked.study, std::move(event)).status());
  // Twice, since what has just begun to finish may be over already.
  for (int step = 0; step < 2; ++step) {
    const study::Standing now = state.standing(*record, turn.now().wall);
    const study::Turn next =
        study::next_turn(now, asked.progress.converged, asked.dry, asked.progress.sentence, record->reason);
    if (next.state == v1::STUDY_STATE_UNSPECIFIED) break;
    // What made it finish stays its last word.
    const std::string sentence = next.state == v1::STUDY_STATE_FINISHED ? record->sentence : next.sentence;
    DROVER_TRY(change(turn, asked.study, next.state, next.reason, sentence));
  }
  return absl::OkStatus();
}

absl::Status fail_study(Turn& turn, std::int64_t study, const std::string& why) {
  const StudyRecord* const record = turn.state().study(study);
  if (record == nullptr || record->final() || record->state == v1::STUDY_STATE_FAILED) return absl::OkStatus();
  return change(turn, study, v1::STUDY_STATE_FAILED, v1::STOP_REASON_FAILURE, why);
}

}  // namespace drover::ledger
