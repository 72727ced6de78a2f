// Enrolment and its roll call (reliability: a worker's disk is the truth about its processes).
#include <algorithm>
#include <set>
#include <utility>

#include "absl/strings/str_cat.h"
#include "absl/strings/escaping.h"
#include "ledger/durations.h"
#include "ledger/handlers.h"
#include "status/try.h"

namespace drover::ledger {
namespace {

using dispatch::Attempt;
using dispatch::Key;

absl::Status check_form(const v1::EnrolRequest& request) {
  if (request.worker().empty()) return absl::InvalidArgumentError("worker: a name is needed");
  if (request.slots() < 0) return absl::InvalidArgumentError(absl::StrCat("slots: ", request.slots(), " is below 0"));
  for (const v1::CodeDefinition& code : request.codes()) {
    if (code.name().empty() || code.digest().empty()) {
      return absl::InvalidArgumentError("codes: every definition needs a name and a digest");
    }
  }
  return absl::OkStatus();
}

absl::Status check_store(Turn& turn, const v1::EnrolRequest& request) {
  store::Store& store = turn.store();
  if (!request.store_id().empty() && request.store_id() != store.store_id()) {
    return refusal(absl::StatusCode::kFailedPrecondition, "OTHER_STORE",
                   absl::StrCat("the spool of worker ", request.worker(), " belongs to store ", request.store_id(),
                                ", this is store ", store.store_id(), "; give the worker another spool folder"));
  }
  const bool behind = request.term() > store.term() || request.newest_receipt().event() > store.head().number;
  if (behind) {
    return refusal(absl::StatusCode::kFailedPrecondition, "STORE_BEHIND",
                   absl::StrCat("worker ", request.worker(), " holds a receipt for event ",
                                request.newest_receipt().event(), " of term ", request.term(),
                                "; this store ends at event ", store.head().number, " of term ", store.term(),
                                ": it was put back from an older copy"));
  }
  return absl::OkStatus();
}

absl::Status check_name(Turn& turn, const v1::EnrolRequest& request) {
  const dispatch::Session* const before = turn.state().book.session_of_worker(request.worker());
  if (before == nullptr || before->lapsed || request.incarnation() > before->incarnation) return absl::OkStatus();
  // The same daemon enrols again after its session was lost sight of, or sends the next page of its roll call.
  if (request.incarnation() == before->incarnation && request.host() == before->host) return absl::OkStatus();
  return refusal(absl::StatusCode::kFailedPrecondition, "NAME_IN_USE",
                 absl::StrCat("a worker named ", request.worker(), " is enrolled from ", before->host,
                              "; give this one another --name"));
}

absl::StatusOr<std::int64_t> open_session(Turn& turn, const v1::EnrolRequest& request, const std::string& token) {
  for (const v1::CodeDefinition& code : request.codes()) {
    if (turn.state().code(code.digest()) != nullptr) continue;
    study::Event event;
    *event.mutable_code_defined()->mutable_definition() = code;
    DROVER_TRY(turn.emit(0, std::move(event)).status());
  }
  study::Event event;
  study::SessionOpened& opened = *event.mutable_session_opened();
  opened.set_session(turn.state().next_session);
  opened.set_token(token);
  opened.set_worker(request.worker());
  opened.set_host(request.host());
  opened.set_version(request.version());
  opened.set_boot_id(request.boot_id());
  opened.set_incarnation(request.incarnation());
  opened.set_slots(request.slots());
  opened.set_cores(request.cores());
  opened.set_memory_bytes(request.memory_bytes());
  *opened.mutable_tags() = request.tags();
  opened.set_fleet_job(request.fleet_job());
  for (const v1::CodeDefinition& code : request.codes()) opened.add_code_digests(code.digest());
  const std::int64_t session = opened.session();
  DROVER_TRY(turn.emit(0, std::move(event)).status());
  return session;
}

absl::Status hear(Turn& turn, const Key& key, std::int64_t session) {
  const dispatch::Run& run = *turn.state().book.run(key.run);
  study::Event event;
  event.mutable_heard()->set_run(key.run);
  event.mutable_heard()->set_fence(key.fence);
  event.mutable_heard()->set_session(session);
  event.mutable_heard()->set_begun(true);
  return turn.emit(run.study, std::move(event)).status();
}

absl::Status hand_back(Turn& turn, const Key& key, const std::string& reason) {
  const std::int64_t study = turn.state().book.run(key.run)->study;
  study::Event event;
  event.mutable_handed_back()->set_run(key.run);
  event.mutable_handed_back()->set_fence(key.fence);
  event.mutable_handed_back()->set_reason(reason);
  return turn.emit(study, std::move(event)).status();
}

v1::AttemptReport loss(const Key& key, v1::LossReason why, const std::string& reason) {
  v1::AttemptReport report;
  report.set_run(key.run);
  report.set_fence(key.fence);
  report.set_ending(v1::ENDING_LOST);
  report.set_loss(why);
  report.set_reason(reason);
  return report;
}

// What the worker says of one attempt, and what it is told to do (the table of the roll call).
absl::StatusOr<v1::RollOrder> answer_entry(Turn& turn, const v1::RollEntry& entry, const std::string& worker,
                                           std::int64_t session) {
  const Key key{entry.run(), entry.fence()};
  const dispatch::Run* const run = turn.state().book.run(key.run);
  const auto at = run == nullptr ? std::map<std::int64_t, Attempt>::const_iterator{} : run->attempts.find(key.fence);
  const bool booked = run != nullptr && at != run->attempts.end() && at->second.worker == worker;
  if (entry.state() == v1::ROLL_STATE_ENDED || entry.state() == v1::ROLL_STATE_LOST) {
    if (booked) DROVER_TRY(hear(turn, key, session));  // its report follows
    return v1::ROLL_ORDER_DELIVER;
  }
  if (!booked) {
    const bool known = key.run < turn.state().next_run;
    return known ? v1::ROLL_ORDER_STOP : v1::ROLL_ORDER_HOLD;
  }
  if (entry.state() == v1::ROLL_STATE_NOT_BEGUN) {
    DROVER_TRY(hand_back(turn, key, "its worker started anew before it began"));
    return v1::ROLL_ORDER_FORGET;
  }
  const bool stop = run->closed || at->second.state == Attempt::State::kStopping;
  DROVER_TRY(hear(turn, key, session));
  return stop ? v1::ROLL_ORDER_STOP : v1::ROLL_ORDER_KEEP;
}

absl::Status call_roll(Turn& turn, const std::vector<v1::RollEntry>& roll, const std::string& worker,
                       std::int64_t session, v1::EnrolResponse& response) {
  std::set<Key> silent;
  for (const Key& key : turn.state().book.attempts_of_worker(worker)) silent.insert(key);
  for (const v1::RollEntry& entry : roll) {
    silent.erase({entry.run(), entry.fence()});
    DROVER_ASSIGN(const v1::RollOrder order, answer_entry(turn, entry, worker, session));
    v1::RollAnswer& answer = *response.add_answers();
    answer.set_run(entry.run());
    answer.set_fence(entry.fence());
    answer.set_order(order);
  }
  for (const Key& key : silent) {
    DROVER_TRY(lose(turn, key.run, key.fence,
                    loss(key, v1::LOSS_REASON_NO_RECORD, "its worker has no record of it")).status());
  }
  return absl::OkStatus();
}

// A page of a roll call may come twice.
void add_once(std::vector<v1::RollEntry>& roll, const v1::RollEntry& entry) {
  const bool there = std::any_of(roll.begin(), roll.end(), [&](const v1::RollEntry& other) {
    return other.run() == entry.run() && other.fence() == entry.fence();
  });
  if (!there) roll.push_back(entry);
}

}  // namespace

absl::StatusOr<v1::EnrolResponse> enrol(Turn& turn, const v1::EnrolRequest& request, const std::string& fresh_token) {
  DROVER_TRY(check_form(request));
  DROVER_TRY(check_store(turn, request));
  DROVER_TRY(check_name(turn, request));
  State& state = turn.state();
  v1::EnrolResponse response;
  response.set_store_id(turn.store().store_id());
  response.set_term(turn.store().term());
  set(*response.mutable_lease(), state.book.times().lease);
  set(*response.mutable_renew_every(), state.book.times().renew_every);
  set(*response.mutable_longest_wait(), state.book.times().longest_poll);
  std::vector<v1::RollEntry>& roll = state.roll_calls[request.worker()];
  for (const v1::RollEntry& entry : request.roll_call()) add_once(roll, entry);
  if (!request.roll_call_complete()) return response;
  const std::vector<v1::RollEntry> whole = std::move(roll);
  state.roll_calls.erase(request.worker());
  DROVER_ASSIGN(const std::int64_t session, open_session(turn, request, fresh_token));
  DROVER_TRY(call_roll(turn, whole, request.worker(), session, response));
  if (request.has_time_left()) {
    state.book.set_time_left(session, to_duration(request.time_left()), turn.now().steady);
  }
  response.set_session(fresh_token);
  return response;
}

}  // namespace drover::ledger
