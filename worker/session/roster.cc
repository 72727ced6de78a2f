#include "session/roster.h"

#include <algorithm>
#include <utility>

#include "absl/time/time.h"

namespace drover::session {
namespace {

Key key_of(const v1::Grant& grant) { return {grant.run(), grant.fence()}; }

}  // namespace

bool Roster::accept(const v1::Grant& grant, absl::Duration now) {
  const std::lock_guard lock(mutex_);
  return attempts_.try_emplace(key_of(grant), Attempt{.grant = grant, .since = now}).second;
}

void Roster::begun(const Key& key, absl::Duration now) {
  const std::lock_guard lock(mutex_);
  const auto at = attempts_.find(key);
  if (at == attempts_.end()) return;
  at->second.phase = Phase::kRunning;
  at->second.since = now;
}

void Roster::ended(const Key& key) {
  const std::lock_guard lock(mutex_);
  if (const auto at = attempts_.find(key); at != attempts_.end()) at->second.phase = Phase::kEnded;
}

void Roster::ready(const Key& key) {
  const std::lock_guard lock(mutex_);
  if (const auto at = attempts_.find(key); at != attempts_.end()) at->second.phase = Phase::kReady;
}

void Roster::wake() {
  const std::lock_guard lock(mutex_);
  changed_.notify_all();
}

void Roster::forget(const Key& key) {
  const std::lock_guard lock(mutex_);
  attempts_.erase(key);
  changed_.notify_all();
}

bool Roster::ask_stop(const Key& key, const std::string& reason) {
  const std::lock_guard lock(mutex_);
  const auto at = attempts_.find(key);
  if (at == attempts_.end() || at->second.stop_asked || at->second.phase > Phase::kRunning) return false;
  at->second.stop_asked = true;
  at->second.stop_reason = reason;
  return true;
}

std::optional<Attempt> Roster::find(const Key& key) const {
  const std::lock_guard lock(mutex_);
  const auto at = attempts_.find(key);
  if (at == attempts_.end()) return std::nullopt;
  return at->second;
}

std::map<Key, Attempt> Roster::all() const {
  const std::lock_guard lock(mutex_);
  return attempts_;
}

int Roster::occupied() const {
  const std::lock_guard lock(mutex_);
  return occupied_locked();
}

int Roster::occupied_locked() const {
  return static_cast<int>(std::count_if(attempts_.begin(), attempts_.end(),
                                        [](const auto& entry) { return entry.second.phase != Phase::kReady; }));
}

int Roster::free_locked() const { return closed_ ? 0 : std::max(0, slots_ - occupied_locked() - promised_); }

int Roster::promise() {
  const std::lock_guard lock(mutex_);
  const int promised = free_locked();
  promised_ += promised;
  return promised;
}

void Roster::release(int promised) {
  const std::lock_guard lock(mutex_);
  promised_ -= promised;
  changed_.notify_all();
}

void Roster::close() {
  const std::lock_guard lock(mutex_);
  closed_ = true;
  changed_.notify_all();
}

void Roster::wait_for_slot(absl::Duration limit) {
  std::unique_lock lock(mutex_);
  changed_.wait_for(lock, absl::ToChronoNanoseconds(limit), [this] { return closed_ || free_locked() > 0; });
}

bool Roster::wait_until_idle(absl::Duration limit) {
  std::unique_lock lock(mutex_);
  return changed_.wait_for(lock, absl::ToChronoNanoseconds(limit), [this] { return occupied_locked() == 0; });
}

}  // namespace drover::session
