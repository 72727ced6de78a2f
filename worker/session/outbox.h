// Reports that wait in the spool for the coordinator, in the order in which they became ready.
#pragma once

#include <condition_variable>
#include <cstddef>
#include <deque>
#include <map>
#include <mutex>
#include <vector>

#include "absl/time/time.h"
#include "session/roster.h"

namespace drover::session {

// Thread-safe.
class Outbox {
 public:
  void add(const Key& key);  // once; a key that waits already stays where it is
  void remove(const Key& key);
  // Lets the key wait behind all others, alone in its batch from now on: one report of its batch was refused, and this
  // finds out which.
  void isolate(const Key& key);

  // The oldest ones, `most` at most; an isolated key comes alone.
  std::vector<Key> batch(std::size_t most) const;
  std::size_t size() const;
  void wait_for_any(absl::Duration limit);
  bool wait_until_empty(absl::Duration limit);  // false: `limit` passed before
  void close();                                 // ends all waits, also later ones

 private:
  mutable std::mutex mutex_;
  std::condition_variable changed_;
  std::deque<Key> waiting_;
  std::map<Key, bool> isolated_;
  bool closed_ = false;
};

}  // namespace drover::session
