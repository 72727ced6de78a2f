// The two clocks that a program has. Below main, nothing else reads the time.
#pragma once

#include <mutex>

#include "absl/time/time.h"

namespace drover::link {

class Clock {
 public:
  virtual ~Clock() = default;
  virtual absl::Time wall() const = 0;        // for people and records; an operator or NTP may step it
  virtual absl::Duration steady() const = 0;  // since some start; never goes back: leases, limits, back-off
};

// Thread-safe. steady() counts time in suspend, too (the boot-time clock).
class RealClock final : public Clock {
 public:
  absl::Time wall() const override;
  absl::Duration steady() const override;
};

// For tests: stands still until it is moved. Thread-safe.
class ManualClock final : public Clock {
 public:
  explicit ManualClock(absl::Time start = absl::UnixEpoch()) : wall_(start) {}
  absl::Time wall() const override;
  absl::Duration steady() const override;
  void advance(absl::Duration by);     // both clocks
  void step_wall(absl::Duration by);   // the wall clock alone

 private:
  mutable std::mutex mutex_;
  absl::Time wall_;
  absl::Duration steady_ = absl::ZeroDuration();
};

}  // namespace drover::link
