// A coordinator in the test's own process: grants what it is told to, keeps what it hears, and fails when it is told
// to.
#pragma once

#include <condition_variable>
#include <cstdint>
#include <deque>
#include <functional>
#include <map>
#include <mutex>
#include <set>
#include <string>
#include <vector>

#include "absl/time/time.h"
#include "session/coordinator.h"
#include "session/roster.h"

namespace drover::session {

class FakeCoordinator final : public Coordinator {
 public:
  // What it heard, in order. Each is a copy.
  std::vector<v1::EnrolRequest> enrolments() const;
  std::vector<v1::LeaseRequest> leases() const;
  std::vector<v1::ReportRequest> report_calls() const;  // also those that were not answered
  std::vector<v1::RenewRequest> renewals() const;
  std::map<Key, v1::AttemptReport> reports() const;  // that were acknowledged
  std::map<Key, int> times_reported() const;

  void grant(const v1::Grant& grant);
  void grant_as_a_poll_is_ended(const v1::Grant& grant);  // by end_polls(): its caller does not learn of it
  void grant_twice(const v1::Grant& grant);               // two answers hold it
  void order_stop(const Key& key);
  void drain(bool on);
  void go_away();  // from now on every call is UNAVAILABLE
  void come_back();
  void lose_sessions();  // NO_SUCH_SESSION until the next enrolment
  // The next `many` calls of that kind are heard and done, and their answers are lost.
  void lose_answers_of_lease(int many);
  void lose_answers_of_report(int many);
  void refuse_reports_of(std::int64_t run);  // INVALID_ARGUMENT for every batch with it
  void speak_in(const std::string& store_id, std::int64_t term);
  // Called at each Report, before anything else.
  void at_report(std::function<void(const v1::ReportRequest&)> look);
  void refuse_enrolments(const absl::Status& status);

  bool eventually(const std::function<bool(const FakeCoordinator&)>& holds,
                  absl::Duration most = absl::Seconds(20)) const;

  absl::StatusOr<v1::EnrolResponse> enrol(const v1::EnrolRequest& request) override;
  absl::StatusOr<v1::LeaseResponse> lease(const v1::LeaseRequest& request) override;
  absl::StatusOr<v1::RenewResponse> renew(const v1::RenewRequest& request) override;
  absl::StatusOr<v1::ReportResponse> report(const v1::ReportRequest& request) override;
  void end_polls() override;
  void abandon() override;
  void reuse();  // takes back an abandon(), for the next daemon of the same test

 private:
  absl::Status check(const std::string& session) const;
  std::vector<v1::Grant> take_grants(int want);

  mutable std::recursive_mutex mutex_;
  mutable std::condition_variable_any changed_;
  std::deque<v1::Grant> waiting_, late_;
  v1::Grant completed(v1::Grant grant) const;
  std::vector<v1::EnrolRequest> enrolments_;
  std::vector<v1::LeaseRequest> leases_;
  std::vector<v1::ReportRequest> report_calls_;
  std::vector<v1::RenewRequest> renewals_;
  std::map<Key, v1::AttemptReport> reports_;
  std::map<Key, int> times_reported_;
  std::map<std::string, v1::LeaseResponse> leases_answered_;
  std::map<std::string, v1::ReportResponse> reports_answered_;
  std::set<Key> stops_;
  std::set<std::int64_t> refused_runs_;
  std::string session_;
  std::string store_id_ = "store-1";
  std::int64_t term_ = 1, events_ = 0;
  int sessions_ = 0, lost_leases_ = 0, lost_reports_ = 0, polls_ended_ = 0;
  bool away_ = false, drain_ = false, abandoned_ = false;
  absl::Status enrolments_refused_;
  std::function<void(const v1::ReportRequest&)> look_;
};

}  // namespace drover::session
