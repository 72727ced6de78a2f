// The session with the coordinator that all threads of a worker share.
#pragma once

#include <condition_variable>
#include <cstdint>
#include <mutex>
#include <optional>
#include <string>

#include "absl/time/time.h"

namespace drover::session {

struct SessionView {
  std::string token;
  std::int64_t generation = 0;  // counts enrolments; an answer asked for in an earlier one may hold no more grants
  absl::Duration renew_every = absl::Seconds(30);
  absl::Duration longest_wait = absl::Seconds(25);
};

// Thread-safe.
class CurrentSession {
 public:
  // A new enrolment begins: from now on grants that were asked for before it are not taken, since its roll call tells
  // the coordinator that they are not here.
  std::int64_t begin();
  void opened(const SessionView& session);  // the enrolment that began last
  void lost(std::int64_t generation);       // if that is still the current one

  std::optional<SessionView> get() const;
  bool is_current(std::int64_t generation) const;
  // Waits until there is a session, the wait is ended for good, or `limit` has passed.
  std::optional<SessionView> wait(absl::Duration limit);
  // Waits until there is none, likewise; true: there is none.
  bool wait_until_lost(absl::Duration limit);
  void end_waits();

 private:
  mutable std::mutex mutex_;
  std::condition_variable changed_;
  std::int64_t generation_ = 0;
  std::optional<SessionView> session_;
  bool ended_ = false;
};

}  // namespace drover::session
