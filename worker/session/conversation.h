// A worker's side of the lease protocol: enrolment and roll call, leases, renewals, reports. What is granted, stopped
// or acknowledged is handed to `Hands`, which does the work.
#pragma once

#include <atomic>
#include <cstdint>
#include <string>
#include <vector>

#include "absl/status/status.h"
#include "drover/v1/work.pb.h"
#include "link/clock.h"
#include "link/retry.h"
#include "session/coordinator.h"
#include "session/current_session.h"
#include "session/options.h"
#include "session/outbox.h"
#include "session/pause.h"
#include "session/roster.h"
#include "session/spool.h"

namespace drover::session {

// Thread-safe.
class Hands {
 public:
  virtual ~Hands() = default;
  // The order is on disk and in the roster after OK. A grant that is here already is passed over.
  virtual absl::Status take(const v1::Grant& grant) = 0;
  virtual void stop(const Key& key, const std::string& reason) = 0;
  // The coordinator has acknowledged the report: what the attempt left behind may go.
  virtual void acknowledged(const Key& key) = 0;
};

// What the threads of a conversation share. All must outlive it.
struct Parties {
  Coordinator& coordinator;
  Spool& spool;
  Roster& roster;
  Outbox& outbox;
  Hands& hands;
  const link::Clock& clock;
};

// Each of the three loops runs in a thread of its own until end(). They repeat what was not answered with the same
// request_id, for ever, with waits that grow.
class Conversation {
 public:
  Conversation(const Options& options, std::vector<v1::CodeDefinition> codes, Parties parties);

  // One enrolment with the whole roll call; repeats calls that were not answered, until end(). FAILED_PRECONDITION,
  // INVALID_ARGUMENT, PERMISSION_DENIED, UNIMPLEMENTED...: refused, an operator must look at it.
  absl::Status enrol();

  void lease_loop();  // runs for free slots
  void renew_loop();  // and a new enrolment when the session is lost
  void report_loop();

  // Asks for no more runs. What a poll under way was granted is still taken, so that Hands can give it back.
  // Returns when the lease loop has ended, or `limit` has passed.
  void end_leases(absl::Duration limit);
  void end();  // all loops, at once; abandons calls under way

 private:
  void lease_once(const SessionView& session, int promised);
  absl::StatusOr<v1::LeaseResponse> ask_for_runs(const SessionView& session, int want);
  void renew_once(const SessionView& session);
  void report_once(const SessionView& session);
  v1::ReportRequest fill_report(const SessionView& session, std::vector<Key>& keys);
  void sent(const v1::ReportResponse& answer, const std::vector<Key>& keys, const SessionView& session);
  void refused(const absl::Status& status, const std::vector<Key>& keys);
  void take_grants(const google::protobuf::RepeatedPtrField<v1::Grant>& grants, const SessionView& session);

  v1::EnrolRequest introduction() const;
  std::vector<v1::RollEntry> roll_call() const;
  absl::StatusOr<v1::EnrolResponse> send_page(const v1::EnrolRequest& request);
  absl::Status open(const v1::EnrolResponse& response, std::int64_t generation);
  void obey(const v1::RollAnswer& answer);

  // Whether to repeat the call that ended so: waits before it says yes; notes a lost session.
  bool repeat(const char* call, const absl::Status& status, link::Backoff& backoff, std::int64_t generation);
  link::Backoff fresh_backoff();
  absl::Duration jittered(absl::Duration span);
  bool may_ask();  // for further runs

  const Options& options_;
  const std::vector<v1::CodeDefinition> codes_;
  Parties parties_;
  CurrentSession session_;
  Pause pause_;
  std::atomic<bool> stopping_ = false, drained_ = false, polling_ = false, leases_ended_ = false, full_ = false;
  std::atomic<std::uint64_t> draws_;
};

}  // namespace drover::session
