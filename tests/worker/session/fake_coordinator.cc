#include "worker/session/fake_coordinator.h"

#include <utility>

#include "absl/strings/cord.h"
#include "absl/strings/str_cat.h"
#include "link/duration.h"
#include "link/status.h"

namespace drover::session {
namespace {

using Lock = std::unique_lock<std::recursive_mutex>;

absl::Status unavailable() { return absl::UnavailableError("the coordinator is away"); }

absl::Status no_such_session() {
  v1::ErrorDetail detail;
  detail.set_reason("NO_SUCH_SESSION");
  absl::Status status = absl::FailedPreconditionError("enrol again");
  status.SetPayload({link::kErrorDetailUrl.data(), link::kErrorDetailUrl.size()},
                    absl::Cord(detail.SerializeAsString()));
  return status;
}

Key key_of(const v1::AttemptReport& report) { return {report.run(), report.fence()}; }

}  // namespace

std::vector<v1::EnrolRequest> FakeCoordinator::enrolments() const { return Lock(mutex_), enrolments_; }
std::vector<v1::LeaseRequest> FakeCoordinator::leases() const { return Lock(mutex_), leases_; }
std::vector<v1::ReportRequest> FakeCoordinator::report_calls() const { return Lock(mutex_), report_calls_; }
std::vector<v1::RenewRequest> FakeCoordinator::renewals() const { return Lock(mutex_), renewals_; }
std::map<Key, v1::AttemptReport> FakeCoordinator::reports() const { return Lock(mutex_), reports_; }
std::map<Key, int> FakeCoordinator::times_reported() const { return Lock(mutex_), times_reported_; }

v1::Grant FakeCoordinator::completed(v1::Grant grant) const {
  if (grant.store_id().empty()) grant.set_store_id(store_id_);
  if (grant.term() == 0) grant.set_term(term_);
  return grant;
}

void FakeCoordinator::grant(const v1::Grant& grant) {
  const Lock lock(mutex_);
  waiting_.push_back(completed(grant));
  changed_.notify_all();
}

void FakeCoordinator::grant_as_a_poll_is_ended(const v1::Grant& grant) {
  const Lock lock(mutex_);
  late_.push_back(completed(grant));
}

void FakeCoordinator::grant_twice(const v1::Grant& grant) {
  const Lock lock(mutex_);
  this->grant(grant);
  this->grant(grant);
}

void FakeCoordinator::order_stop(const Key& key) {
  const Lock lock(mutex_);
  stops_.insert(key);
}

void FakeCoordinator::drain(bool on) {
  const Lock lock(mutex_);
  drain_ = on;
}

void FakeCoordinator::go_away() {
  const Lock lock(mutex_);
  away_ = true;
  changed_.notify_all();
}

void FakeCoordinator::come_back() {
  const Lock lock(mutex_);
  away_ = false;
}

void FakeCoordinator::lose_sessions() {
  const Lock lock(mutex_);
  session_.clear();
  changed_.notify_all();
}

void FakeCoordinator::lose_answers_of_lease(int many) {
  const Lock lock(mutex_);
  lost_leases_ = many;
}

void FakeCoordinator::lose_answers_of_report(int many) {
  const Lock lock(mutex_);
  lost_reports_ = many;
}

void FakeCoordinator::refuse_reports_of(std::int64_t run) {
  const Lock lock(mutex_);
  refused_runs_.insert(run);
}

void FakeCoordinator::speak_in(const std::string& store_id, std::int64_t term) {
  const Lock lock(mutex_);
  store_id_ = store_id;
  term_ = term;
}

void FakeCoordinator::at_report(std::function<void(const v1::ReportRequest&)> look) {
  const Lock lock(mutex_);
  look_ = std::move(look);
}

void FakeCoordinator::refuse_enrolments(const absl::Status& status) {
  const Lock lock(mutex_);
  enrolments_refused_ = status;
}

bool FakeCoordinator::eventually(const std::function<bool(const FakeCoordinator&)>& holds, absl::Duration most) const {
  Lock lock(mutex_);
  return changed_.wait_for(lock, absl::ToChronoNanoseconds(most), [&] { return holds(*this); });
}

absl::Status FakeCoordinator::check(const std::string& session) const {
  if (abandoned_) return absl::CancelledError("abandoned");
  if (away_) return unavailable();
  if (session != session_) return no_such_session();
  return absl::OkStatus();
}

absl::StatusOr<v1::EnrolResponse> FakeCoordinator::enrol(const v1::EnrolRequest& request) {
  const Lock lock(mutex_);
  enrolments_.push_back(request);
  changed_.notify_all();
  if (abandoned_) return absl::CancelledError("abandoned");
  if (away_) return unavailable();
  if (!enrolments_refused_.ok()) return enrolments_refused_;
  v1::EnrolResponse answer;
  session_ = absl::StrCat("session-", ++sessions_);
  answer.set_session(session_);
  answer.set_store_id(store_id_);
  answer.set_term(term_);
  *answer.mutable_lease() = link::to_proto(absl::Seconds(1));
  *answer.mutable_renew_every() = link::to_proto(absl::Milliseconds(50));
  *answer.mutable_longest_wait() = link::to_proto(absl::Seconds(25));
  for (const v1::RollEntry& entry : request.roll_call()) {
    v1::RollAnswer& one = *answer.add_answers();
    one.set_run(entry.run());
    one.set_fence(entry.fence());
    one.set_order(entry.state() == v1::ROLL_STATE_RUNNING ? v1::ROLL_ORDER_KEEP : v1::ROLL_ORDER_DELIVER);
  }
  return answer;
}

std::vector<v1::Grant> FakeCoordinator::take_grants(int want) {
  std::vector<v1::Grant> grants;
  while (want-- > 0 && !waiting_.empty()) {
    grants.push_back(waiting_.front());
    waiting_.pop_front();
  }
  return grants;
}

absl::StatusOr<v1::LeaseResponse> FakeCoordinator::lease(const v1::LeaseRequest& request) {
  Lock lock(mutex_);
  leases_.push_back(request);
  changed_.notify_all();
  if (const absl::Status status = check(request.session()); !status.ok()) return status;
  if (const auto at = leases_answered_.find(request.request_id()); at != leases_answered_.end()) return at->second;
  const int ended_before = polls_ended_;
  changed_.wait_for(lock, absl::ToChronoNanoseconds(link::from_proto(request.wait())), [&] {
    return !waiting_.empty() || polls_ended_ != ended_before || !check(request.session()).ok();
  });
  if (const absl::Status status = check(request.session()); !status.ok()) return status;
  v1::LeaseResponse answer;
  for (const v1::Grant& grant : take_grants(request.want())) *answer.add_grants() = grant;
  leases_answered_[request.request_id()] = answer;
  if (polls_ended_ != ended_before) return absl::CancelledError("the poll was ended");
  if (answer.grants_size() > 0 && lost_leases_ > 0) {
    --lost_leases_;
    return unavailable();
  }
  return answer;
}

absl::StatusOr<v1::RenewResponse> FakeCoordinator::renew(const v1::RenewRequest& request) {
  const Lock lock(mutex_);
  renewals_.push_back(request);
  changed_.notify_all();
  if (const absl::Status status = check(request.session()); !status.ok()) return status;
  v1::RenewResponse answer;
  answer.set_drain(drain_);
  for (const v1::AttemptStatus& status : request.attempts()) {
    v1::AttemptOrder& order = *answer.add_orders();
    order.set_run(status.run());
    order.set_fence(status.fence());
    const bool stop = stops_.contains({status.run(), status.fence()});
    order.set_order(stop ? v1::AttemptOrder::ORDER_STOP : v1::AttemptOrder::ORDER_KEEP);
    if (stop) order.set_reason("the study was stopped");
  }
  return answer;
}

absl::StatusOr<v1::ReportResponse> FakeCoordinator::report(const v1::ReportRequest& request) {
  const Lock lock(mutex_);
  report_calls_.push_back(request);
  if (look_) look_(request);
  changed_.notify_all();
  if (const absl::Status status = check(request.session()); !status.ok()) return status;
  if (const auto at = reports_answered_.find(request.request_id()); at != reports_answered_.end()) return at->second;
  for (const v1::AttemptReport& report : request.reports()) {
    if (refused_runs_.contains(report.run())) return absl::InvalidArgumentError("a text is longer than allowed");
  }
  v1::ReportResponse answer;
  for (const v1::AttemptReport& report : request.reports()) {
    reports_.emplace(key_of(report), report);
    ++times_reported_[key_of(report)];
    v1::Receipt& receipt = *answer.add_receipts();
    receipt.set_run(report.run());
    receipt.set_fence(report.fence());
    receipt.set_store_id(store_id_);
    receipt.set_term(term_);
    receipt.set_event(++events_);
    receipt.set_chain_hash("hash");
    receipt.set_reception(v1::RECEPTION_SETTLED);
  }
  for (const v1::Grant& grant : take_grants(request.want())) *answer.add_grants() = grant;
  reports_answered_[request.request_id()] = answer;
  if (lost_reports_ > 0) {
    --lost_reports_;
    return unavailable();
  }
  return answer;
}

void FakeCoordinator::end_polls() {
  const Lock lock(mutex_);
  waiting_.insert(waiting_.end(), late_.begin(), late_.end());
  late_.clear();
  ++polls_ended_;
  changed_.notify_all();
}

void FakeCoordinator::abandon() {
  const Lock lock(mutex_);
  abandoned_ = true;
  changed_.notify_all();
}

void FakeCoordinator::reuse() {
  const Lock lock(mutex_);
  abandoned_ = false;
}

}  // namespace drover::session
