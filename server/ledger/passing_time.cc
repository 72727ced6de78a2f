// What time alone brings about: lapsed leases, patience that is over, licences of the silent, deadlines.
#include <utility>

#include "ledger/handlers.h"
#include "status/try.h"

namespace drover::ledger {
namespace {

using dispatch::Attempt;
using dispatch::Key;

// Nobody has heard from the worker. Its runs are parked and nothing is stopped: they may well be running.
absl::Status park(Turn& turn) {
  dispatch::Book& book = turn.state().book;
  for (const std::int64_t session : book.lapsed(turn.now().steady)) {
    for (const Key& key : book.attempts_of_worker(book.session(session)->worker)) {
      const dispatch::Run& run = *book.run(key.run);
      const Attempt::State state = run.attempts.at(key.fence).state;
      if (state == Attempt::State::kParked || state == Attempt::State::kStopping) continue;
      study::Event event;
      event.mutable_parked()->set_run(key.run);
      event.mutable_parked()->set_fence(key.fence);
      DROVER_TRY(turn.emit(run.study, std::move(event)).status());
    }
    book.mark_lapsed(session);
  }
  return absl::OkStatus();
}

// A second attempt is allowed; the old one stays open and its report is as good as any.
absl::Status release(Turn& turn) {
  dispatch::Book& book = turn.state().book;
  for (const Key& key : book.impatient(turn.now().steady)) {
    const dispatch::Run& run = *book.run(key.run);
    const bool stopping = run.attempts.at(key.fence).state == Attempt::State::kStopping;
    study::Event event;
    event.mutable_released()->set_run(key.run);
    event.mutable_released()->set_fence(key.fence);
    DROVER_TRY(turn.emit(run.study, std::move(event)).status());
    if (stopping && !run.closed) DROVER_TRY(withdraw(turn, key.run));
  }
  return absl::OkStatus();
}

absl::Status free_licences(Turn& turn) {
  dispatch::Book& book = turn.state().book;
  for (const Key& key : book.overdue_licences(turn.now().steady)) {
    study::Event event;
    event.mutable_licences_released()->set_run(key.run);
    event.mutable_licences_released()->set_fence(key.fence);
    event.mutable_licences_released()->set_reason("its own time limit has passed since its worker fell silent");
    DROVER_TRY(turn.emit(book.run(key.run)->study, std::move(event)).status());
  }
  return absl::OkStatus();
}

absl::Status withdraw_waiting(Turn& turn, std::int64_t study) {
  for (const std::int64_t id : turn.state().book.open_runs(study)) {
    if (turn.state().book.run(id)->attempts.empty()) DROVER_TRY(withdraw(turn, id));
  }
  return absl::OkStatus();
}

absl::Status end_at_deadlines(Turn& turn) {
  std::vector<std::int64_t> due;
  for (const auto& [id, record] : turn.state().studies()) {
    const bool running = record.state == v1::STUDY_STATE_ACTIVE || record.state == v1::STUDY_STATE_PAUSED;
    if (running && turn.state().standing(record, turn.now().wall).deadline_passed) due.push_back(id);
  }
  for (const std::int64_t id : due) {
    study::Event event;
    event.mutable_study_changed()->set_state(v1::STUDY_STATE_FINISHING);
    event.mutable_study_changed()->set_reason(v1::STOP_REASON_DEADLINE);
    event.mutable_study_changed()->set_sentence("the deadline has passed; runs that have begun go on to their end");
    DROVER_TRY(turn.emit(id, std::move(event)).status());
    DROVER_TRY(withdraw_waiting(turn, id));
  }
  return absl::OkStatus();
}

}  // namespace

absl::Status pass_time(Turn& turn) {
  DROVER_TRY(park(turn));
  DROVER_TRY(release(turn));
  DROVER_TRY(free_licences(turn));
  return end_at_deadlines(turn);
}

}  // namespace drover::ledger
