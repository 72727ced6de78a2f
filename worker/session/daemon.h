// The worker daemon as a whole: opens the spool, settles what an earlier daemon left, enrols, and works until it is
// stopped.
#pragma once

#include <condition_variable>
#include <memory>
#include <mutex>
#include <thread>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "code/catalogue.h"
#include "link/clock.h"
#include "process/files.h"
#include "session/attempts.h"
#include "session/conversation.h"
#include "session/coordinator.h"
#include "session/options.h"
#include "session/outbox.h"
#include "session/roster.h"
#include "session/spool.h"

namespace drover::session {

class Daemon {
 public:
  // The references must outlive it. Errors: those of Options::validate() and Spool::open().
  static absl::StatusOr<std::unique_ptr<Daemon>> open(Options options, const code::Catalogue& catalogue,
                                                      Coordinator& coordinator, process::Files& files,
                                                      const link::Clock& clock);
  ~Daemon();

  // Works until stop(), then ends in good order: takes no more runs, hands back what has not begun, stops what runs,
  // and delivers what the coordinator takes within some seconds; the rest waits in the spool for the next start.
  // Returns an error only when the first enrolment is refused, with the coordinator's words.
  absl::Status run();
  void stop();           // from any thread; returns at once
  void drop_for_test();  // as a crash would: run() returns, and what runs is left to its runners

 private:
  Daemon(Options options, const code::Catalogue& catalogue, const link::Clock& clock)
      : options_(std::move(options)), catalogue_(catalogue), clock_(clock), roster_(options_.slots) {}
  void converse();
  void wait_for_stop();
  bool dropped();
  void end_in_order();
  absl::Duration longest_grace() const;

  const Options options_;
  const code::Catalogue& catalogue_;
  const link::Clock& clock_;
  std::unique_ptr<Spool> spool_;
  Roster roster_;
  Outbox outbox_;
  std::unique_ptr<Attempts> attempts_;
  std::unique_ptr<Conversation> conversation_;
  std::vector<std::thread> loops_;
  std::mutex mutex_;
  std::condition_variable changed_;
  bool stopping_ = false, enrolled_ = false, dropped_ = false;
};

}  // namespace drover::session
