// Waits that the end of a worker cuts short.
#pragma once

#include <condition_variable>
#include <mutex>

#include "absl/time/time.h"

namespace drover::session {

// Thread-safe.
class Pause {
 public:
  // Waits so long; false: at once, because the end has come.
  bool wait(absl::Duration span) {
    std::unique_lock lock(mutex_);
    return !changed_.wait_for(lock, absl::ToChronoNanoseconds(span), [this] { return ended_; });
  }
  void end() {
    const std::lock_guard lock(mutex_);
    ended_ = true;
    changed_.notify_all();
  }
  bool ended() const {
    const std::lock_guard lock(mutex_);
    return ended_;
  }

 private:
  mutable std::mutex mutex_;
  std::condition_variable changed_;
  bool ended_ = false;
};

}  // namespace drover::session
