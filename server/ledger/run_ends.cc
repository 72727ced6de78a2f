// What follows when a run, a candidate or a study comes to its end.
#include <utility>

#include "absl/strings/str_cat.h"
#include "ledger/handlers.h"
#include "status/try.h"

namespace drover::ledger {

absl::StatusOr<store::Appended> lose(Turn& turn, std::int64_t run, std::int64_t fence, v1::AttemptReport report) {
  const dispatch::Run& before = *turn.state().book.run(run);
  const std::int64_t study = before.study;
  const bool stopping = before.attempts.at(fence).state == dispatch::Attempt::State::kStopping;
  study::Event event;
  event.mutable_attempt_lost()->set_run(run);
  event.mutable_attempt_lost()->set_fence(fence);
  *event.mutable_attempt_lost()->mutable_report() = std::move(report);
  DROVER_ASSIGN(store::Appended appended, turn.emit(study, std::move(event)));
  const dispatch::Run* const left = turn.state().book.run(run);
  if (left == nullptr || left->closed) return appended;
  if (stopping && left->attempts.empty()) {
    DROVER_TRY(withdraw(turn, run));
  } else if (turn.state().book.poisonous(*left) && !left->set_aside) {
    study::Event aside;
    aside.mutable_set_aside()->set_run(run);
    aside.mutable_set_aside()->set_reason("its processes were killed from outside on three workers");
    DROVER_TRY(turn.emit(study, std::move(aside)).status());
  }
  return appended;
}

absl::Status withdraw(Turn& turn, std::int64_t run) {
  const dispatch::Run& before = *turn.state().book.run(run);
  const std::int64_t study = before.study, candidate = before.candidate;
  study::Event event;
  event.mutable_withdrawn()->set_run(run);
  DROVER_TRY(turn.emit(study, std::move(event)).status());
  DROVER_TRY(after_run(turn, study, candidate));
  return after_stop(turn, study);
}

absl::Status after_run(Turn& turn, std::int64_t study, std::int64_t candidate) {
  const StudyRecord& record = *turn.state().study(study);
  const auto open = record.open.find(candidate);
  if (open == record.open.end() || open->second.ended < open->second.runs) return absl::OkStatus();
  const OpenCandidate& whole = open->second;
  study::Event event;
  study::CandidateLearned& learned = *event.mutable_candidate_learned();
  learned.set_candidate(candidate);
  // In candidate order an outcome's place is fixed by its number; otherwise it is the order of arrival.
  const bool by_number = record.spec.search().order() == v1::ORDER_CANDIDATE;
  learned.set_position(by_number ? candidate : record.learned + 1);
  *learned.mutable_score() = record.plan->score(whole.values, whole.results);
  const bool feasible = learned.score().verdict() == v1::CANDIDATE_VERDICT_FEASIBLE;
  learned.set_leads(feasible && (!record.best || record.plan->better(learned.score(), *record.best)));
  return turn.emit(study, std::move(event)).status();
}

absl::Status after_stop(Turn& turn, std::int64_t study) {
  const StudyRecord* const record = turn.state().study(study);
  const bool over = record != nullptr && record->state == v1::STUDY_STATE_STOPPING &&
                    turn.state().book.open_count(study) == 0;
  if (!over) return absl::OkStatus();
  study::Event event;
  event.mutable_study_changed()->set_state(v1::STUDY_STATE_STOPPED);
  event.mutable_study_changed()->set_reason(record->reason);
  event.mutable_study_changed()->set_sentence("stopped by a person");
  return turn.emit(study, std::move(event)).status();
}

}  // namespace drover::ledger
