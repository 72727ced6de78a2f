// Lease and Renew: who gets what, and who goes on.
#include <algorithm>
#include <utility>

#include "absl/strings/str_cat.h"
#include "ledger/durations.h"
#include "ledger/handlers.h"
#include "status/try.h"

namespace drover::ledger {
namespace {

using dispatch::Attempt;

v1::Grant describe(Turn& turn, const StudyRecord& record, const dispatch::Run& run, std::int64_t fence) {
  const OpenCandidate& candidate = record.open.at(run.candidate);
  const v1::CodeUse& code = record.spec.codes(run.code);
  v1::Grant grant;
  grant.set_store_id(turn.store().store_id());
  grant.set_term(turn.store().term());
  grant.set_run(run.id);
  grant.set_fence(fence);
  grant.set_study(record.name);
  grant.set_number(run.number);
  grant.set_candidate(run.candidate);
  grant.set_condition(run.condition);
  grant.set_replicate(run.replicate);
  grant.set_code(code.code());
  grant.set_code_digest(code.digest());
  for (v1::NamedValue& input : record.plan->inputs(candidate.values, run.condition)) {
    *grant.add_inputs() = std::move(input);
  }
  grant.set_input_digest(run.input_digest);
  return grant;
}

absl::Status begin(Turn& turn, const dispatch::Run& run, std::int64_t fence) {
  study::Event event;
  event.mutable_begun()->set_run(run.id);
  event.mutable_begun()->set_fence(fence);
  return turn.emit(run.study, std::move(event)).status();
}

absl::Status hear(Turn& turn, const dispatch::Run& run, std::int64_t fence, std::int64_t session, bool begun) {
  study::Event event;
  event.mutable_heard()->set_run(run.id);
  event.mutable_heard()->set_fence(fence);
  event.mutable_heard()->set_session(session);
  event.mutable_heard()->set_begun(begun);
  return turn.emit(run.study, std::move(event)).status();
}

// Brings the booked state up to what the worker says; OK without an event where nothing changes, so that renewals
// write nothing.
absl::StatusOr<v1::AttemptOrder> renew_one(Turn& turn, const v1::AttemptStatus& status, std::int64_t session) {
  v1::AttemptOrder order;
  order.set_run(status.run());
  order.set_fence(status.fence());
  order.set_order(v1::AttemptOrder::ORDER_STOP);
  const dispatch::Run* const run = turn.state().book.run(status.run());
  if (run == nullptr) {
    order.set_reason("the run is settled or withdrawn");
    if (status.run() >= turn.state().next_run) order.set_order(v1::AttemptOrder::ORDER_KEEP);  // unknown: held
    return order;
  }
  const auto at = run->attempts.find(status.fence());
  if (at == run->attempts.end()) {
    // Ended here, alive there: it may still bring the first valid report, unless the run is over.
    order.set_reason(run->closed ? "the run is settled or withdrawn" : "");
    if (!run->closed) order.set_order(v1::AttemptOrder::ORDER_KEEP);
    return order;
  }
  if (run->closed || at->second.state == Attempt::State::kStopping) {
    order.set_reason(run->closed ? "the run is settled or withdrawn" : "the study was stopped");
    return order;
  }
  const bool running = status.state() == v1::ROLL_STATE_RUNNING || status.state() == v1::ROLL_STATE_ENDED;
  if (at->second.state == Attempt::State::kParked) {
    DROVER_TRY(hear(turn, *run, status.fence(), session, running));
  } else if (at->second.state == Attempt::State::kGranted && running) {
    DROVER_TRY(begin(turn, *run, status.fence()));
  }
  order.set_order(v1::AttemptOrder::ORDER_KEEP);
  return order;
}

}  // namespace

absl::StatusOr<std::int64_t> session_of(Turn& turn, const std::string& token) {
  const dispatch::Session* const session = turn.state().book.session_by_token(token);
  if (session == nullptr) {
    return refusal(absl::StatusCode::kFailedPrecondition, "NO_SUCH_SESSION",
                   "this session is not known here; enrol again");
  }
  turn.state().book.heard(session->id, turn.now().steady);
  return session->id;
}

absl::StatusOr<std::vector<v1::Grant>> grant_runs(Turn& turn, std::int64_t session, int want) {
  std::vector<v1::Grant> grants;
  State& state = turn.state();
  const int most = std::min(want, state.book.free_slots(session));
  for (int n = 0; n < most; ++n) {
    const std::optional<std::int64_t> picked = state.book.pick(session, turn.now().steady);
    if (!picked) break;
    const dispatch::Run& run = *state.book.run(*picked);
    const StudyRecord& record = *state.study(run.study);
    const v1::CodeDefinition* const code = state.code(record.spec.codes(run.code).digest());
    study::Event event;
    event.mutable_granted()->set_run(run.id);
    event.mutable_granted()->set_fence(run.fence + 1);
    event.mutable_granted()->set_session(session);
    if (code != nullptr) *event.mutable_granted()->mutable_licences() = code->licences();
    DROVER_TRY(turn.emit(run.study, std::move(event)).status());
    grants.push_back(describe(turn, record, run, run.fence));
  }
  return grants;
}

absl::StatusOr<v1::LeaseResponse> lease(Turn& turn, const v1::LeaseRequest& request) {
  if (request.want() < 1) return absl::InvalidArgumentError(absl::StrCat("want: ", request.want(), " is below 1"));
  DROVER_ASSIGN(const std::int64_t session, session_of(turn, request.session()));
  if (request.has_time_left()) {
    turn.state().book.set_time_left(session, to_duration(request.time_left()), turn.now().steady);
  }
  v1::LeaseResponse response;
  DROVER_ASSIGN(std::vector<v1::Grant> grants, grant_runs(turn, session, request.want()));
  for (v1::Grant& grant : grants) *response.add_grants() = std::move(grant);
  return response;
}

absl::StatusOr<v1::RenewResponse> renew(Turn& turn, const v1::RenewRequest& request) {
  DROVER_ASSIGN(const std::int64_t session, session_of(turn, request.session()));
  if (request.has_time_left()) {
    turn.state().book.set_time_left(session, to_duration(request.time_left()), turn.now().steady);
  }
  v1::RenewResponse response;
  set(*response.mutable_lease(), turn.state().book.times().lease);
  for (const v1::AttemptStatus& status : request.attempts()) {
    DROVER_ASSIGN(*response.add_orders(), renew_one(turn, status, session));
  }
  return response;
}

}  // namespace drover::ledger
