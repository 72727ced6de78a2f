// A daemon that is kept running: started, and started again when it ends by itself.
#pragma once

#include <cstdint>
#include <string>

#include "absl/status/status.h"
#include "absl/time/time.h"
#include "commands/process.h"
#include "link/clock.h"
#include "link/retry.h"

namespace drover::commands {

// Not thread-safe. Its destructor kills the process, if it still runs, and waits for it.
class Daemon {
 public:
  static constexpr int kMostQuickEnds = 5;                        // in a row
  static constexpr absl::Duration kQuick = absl::Seconds(5);      // an earlier end is a quick one
  static constexpr absl::Duration kEndGrace = absl::Seconds(20);  // between SIGTERM and SIGKILL

  // `name`: for messages. `seed`: of the waits between starts.
  Daemon(std::string name, ProgramCall call, std::uint64_t seed);
  ~Daemon();
  Daemon(const Daemon&) = delete;
  Daemon& operator=(const Daemon&) = delete;

  // Starts it when it does not run and its wait is over. ABORTED, with the tail of its log, when it will not run: it
  // ended quickly five times in a row, or three times with exit code 2 (wrong usage or input). Call it often.
  absl::Status tend(absl::Duration now);

  // What happened since the last call, for people; empty: nothing.
  std::string take_news();

  bool running() const { return child_ > 0; }
  pid_t pid() const { return child_; }

  // Asks it to end, waits up to kEndGrace, then kills it. At once when it does not run.
  void end(const link::Clock& clock);

 private:
  void reap(absl::Duration now);

  std::string name_;
  ProgramCall call_;
  link::Backoff backoff_;
  pid_t child_ = 0;
  absl::Duration started_ = absl::ZeroDuration();
  absl::Duration not_before_ = -absl::InfiniteDuration();
  int quick_ends_ = 0;
  bool hopeless_ = false;
  ProcessEnd last_end_ = {};
  std::string news_;
};

}  // namespace drover::commands
