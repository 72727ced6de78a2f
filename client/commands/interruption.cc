#include "commands/interruption.h"

namespace drover::commands {

void Interruption::expect() {
  const std::lock_guard lock(mutex_);
  expected_ = true;
}

bool Interruption::expected() const {
  const std::lock_guard lock(mutex_);
  return expected_;
}

void Interruption::happen() {
  const std::lock_guard lock(mutex_);
  happened_ = true;
  changed_.notify_all();
}

bool Interruption::happened() const {
  const std::lock_guard lock(mutex_);
  return happened_;
}

bool Interruption::wait(absl::Duration span) const {
  std::unique_lock lock(mutex_);
  return changed_.wait_for(lock, absl::ToChronoNanoseconds(span), [this] { return happened_; });
}

}  // namespace drover::commands
