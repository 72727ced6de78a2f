// When a daemon should end: a signal, or the end of the process that started it for itself alone.
#pragma once

#include <sys/types.h>

#include <functional>
#include <memory>

#include "absl/status/statusor.h"
#include "absl/time/time.h"

namespace drover::link {

// Blocks SIGTERM, SIGINT and SIGHUP in this thread and all it starts from now on, and ignores SIGPIPE. Call it in main
// before any thread exists.
void block_signals();

enum class StopCause { kSignal, kOwnerGone };

// Waits in a thread of its own for a signal that block_signals() blocked, or for the end of process `owner` (0:
// nobody's; watched by pidfd, and by its start time where there is none), and calls `stop` once for each such event, in
// that thread, with the count (1, 2...): a second signal means: quickly. Signals within `together` of one that was
// counted are the same wish (a terminal and a parent both pass it on), and so is the owner's end after a signal. The
// destructor ends the thread.
class StopWatch {
 public:
  using Callback = std::function<void(StopCause cause, int count)>;
  static absl::StatusOr<std::unique_ptr<StopWatch>> start(pid_t owner, Callback stop,
                                                          absl::Duration together = absl::Milliseconds(500));
  virtual ~StopWatch() = default;
};

}  // namespace drover::link
