#include "session/current_session.h"

namespace drover::session {

std::int64_t CurrentSession::begin() {
  const std::lock_guard lock(mutex_);
  session_.reset();
  return ++generation_;
}

void CurrentSession::opened(const SessionView& session) {
  const std::lock_guard lock(mutex_);
  if (session.generation != generation_) return;
  session_ = session;
  changed_.notify_all();
}

void CurrentSession::lost(std::int64_t generation) {
  const std::lock_guard lock(mutex_);
  if (generation != generation_) return;
  session_.reset();
  changed_.notify_all();
}

std::optional<SessionView> CurrentSession::get() const {
  const std::lock_guard lock(mutex_);
  return session_;
}

bool CurrentSession::is_current(std::int64_t generation) const {
  const std::lock_guard lock(mutex_);
  return generation == generation_;
}

std::optional<SessionView> CurrentSession::wait(absl::Duration limit) {
  std::unique_lock lock(mutex_);
  changed_.wait_for(lock, absl::ToChronoNanoseconds(limit), [this] { return ended_ || session_.has_value(); });
  return session_;
}

bool CurrentSession::wait_until_lost(absl::Duration limit) {
  std::unique_lock lock(mutex_);
  changed_.wait_for(lock, absl::ToChronoNanoseconds(limit), [this] { return ended_ || !session_.has_value(); });
  return !session_.has_value();
}

void CurrentSession::end_waits() {
  const std::lock_guard lock(mutex_);
  ended_ = true;
  changed_.notify_all();
}

}  // namespace drover::session
