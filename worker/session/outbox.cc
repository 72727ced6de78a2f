#include "session/outbox.h"

#include <algorithm>

namespace drover::session {

void Outbox::add(const Key& key) {
  const std::lock_guard lock(mutex_);
  if (!isolated_.try_emplace(key, false).second) return;
  waiting_.push_back(key);
  changed_.notify_all();
}

void Outbox::remove(const Key& key) {
  const std::lock_guard lock(mutex_);
  isolated_.erase(key);
  waiting_.erase(std::remove(waiting_.begin(), waiting_.end(), key), waiting_.end());
  changed_.notify_all();
}

void Outbox::isolate(const Key& key) {
  const std::lock_guard lock(mutex_);
  const auto at = isolated_.find(key);
  if (at == isolated_.end()) return;
  at->second = true;
  waiting_.erase(std::remove(waiting_.begin(), waiting_.end(), key), waiting_.end());
  waiting_.push_back(key);
}

std::vector<Key> Outbox::batch(std::size_t most) const {
  const std::lock_guard lock(mutex_);
  std::vector<Key> keys;
  for (const Key& key : waiting_) {
    const bool alone = isolated_.at(key);
    if (keys.size() == most || (alone && !keys.empty())) break;
    keys.push_back(key);
    if (alone) break;
  }
  return keys;
}

std::size_t Outbox::size() const {
  const std::lock_guard lock(mutex_);
  return waiting_.size();
}

void Outbox::wait_for_any(absl::Duration limit) {
  std::unique_lock lock(mutex_);
  changed_.wait_for(lock, absl::ToChronoNanoseconds(limit), [this] { return closed_ || !waiting_.empty(); });
}

bool Outbox::wait_until_empty(absl::Duration limit) {
  std::unique_lock lock(mutex_);
  changed_.wait_for(lock, absl::ToChronoNanoseconds(limit), [this] { return closed_ || waiting_.empty(); });
  return waiting_.empty();
}

void Outbox::close() {
  const std::lock_guard lock(mutex_);
  closed_ = true;
  changed_.notify_all();
}

}  // namespace drover::session
