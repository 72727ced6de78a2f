#include "link/clock.h"

#include <ctime>

#include "absl/time/clock.h"

namespace drover::link {

absl::Time RealClock::wall() const { return absl::Now(); }

absl::Duration RealClock::steady() const {
  timespec now{};
  clock_gettime(CLOCK_BOOTTIME, &now);
  return absl::DurationFromTimespec(now);
}

absl::Time ManualClock::wall() const {
  const std::lock_guard lock(mutex_);
  return wall_;
}

absl::Duration ManualClock::steady() const {
  const std::lock_guard lock(mutex_);
  return steady_;
}

void ManualClock::advance(absl::Duration by) {
  const std::lock_guard lock(mutex_);
  wall_ += by;
  steady_ += by;
}

void ManualClock::step_wall(absl::Duration by) {
  const std::lock_guard lock(mutex_);
  wall_ += by;
}

}  // namespace drover::link
