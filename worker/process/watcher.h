// Tells when a runner has gone.
#pragma once

#include <sys/types.h>

#include <functional>
#include <memory>

#include "absl/status/status.h"
#include "absl/status/statusor.h"

namespace drover::process {

// One thread over pidfds. Thread-safe; callbacks run on its thread, once each, and may add further ones.
class Watcher {
 public:
  static absl::StatusOr<std::unique_ptr<Watcher>> start();
  virtual ~Watcher() = default;  // joins; callbacks that have not come never will
  // `gone` is called when process `pid`, a child of ours, has ended; it has been reaped by then. NOT_FOUND: there is no
  // such process (a child that ended already is one until it is reaped here).
  virtual absl::Status add(pid_t pid, std::function<void()> gone) = 0;
};

}  // namespace drover::process
