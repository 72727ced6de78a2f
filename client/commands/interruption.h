// Ctrl-C and its like, as a thing that can be waited for.
#pragma once

#include <condition_variable>
#include <mutex>

#include "absl/time/time.h"

namespace drover::commands {

// Thread-safe.
class Interruption {
 public:
  // From now on an interruption is the command's to deal with. Before that, the process ends at the first one.
  void expect();
  bool expected() const;

  void happen();
  bool happened() const;
  // True as soon as it happened, false after `span`.
  bool wait(absl::Duration span) const;

 private:
  mutable std::mutex mutex_;
  mutable std::condition_variable changed_;
  bool expected_ = false;
  bool happened_ = false;
};

}  // namespace drover::commands
