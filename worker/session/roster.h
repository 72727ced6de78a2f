// The attempts a worker has in hand, from their grant until the coordinator has acknowledged how they ended, and which
// of its slots are taken.
#pragma once

#include <compare>
#include <condition_variable>
#include <cstdint>
#include <map>
#include <mutex>
#include <optional>
#include <string>
#include <vector>

#include "absl/time/time.h"
#include "drover/v1/work.pb.h"

namespace drover::session {

struct Key {
  std::int64_t run = 0;
  std::int64_t fence = 0;
  auto operator<=>(const Key&) const = default;
};

enum class Phase {
  kAccepted,  // its order is on disk
  kRunning,
  kEnded,  // its runner has ended, its report is being made
  kReady,  // its report is in the spool
};

struct Attempt {
  v1::Grant grant;
  Phase phase = Phase::kAccepted;
  absl::Duration since = absl::ZeroDuration();  // steady time at which it was accepted, then at which it began
  bool stop_asked = false;
  std::string stop_reason;
};

// Thread-safe.
class Roster {
 public:
  explicit Roster(int slots) : slots_(slots) {}

  // False, and nothing changes: it is here already.
  bool accept(const v1::Grant& grant, absl::Duration now);
  void begun(const Key& key, absl::Duration now);
  void ended(const Key& key);
  void ready(const Key& key);  // gives its slot free, without waking who waits for one
  void wake();
  void forget(const Key& key);  // acknowledged
  // Marks it, and says whether it was not marked before and has not ended.
  bool ask_stop(const Key& key, const std::string& reason);

  std::optional<Attempt> find(const Key& key) const;
  std::map<Key, Attempt> all() const;
  int occupied() const;  // attempts that hold a slot

  // Takes all slots that are neither occupied nor promised, for a request under way; 0: there is none. What was taken
  // is given back with release() once the answer's grants have been accepted.
  int promise();
  void release(int promised);
  void close();  // promise() gives no more

  // Waits until a slot could be promised, or the roster is closed; `limit` at most.
  void wait_for_slot(absl::Duration limit);
  // Waits until no attempt holds a slot; false: `limit` passed before.
  bool wait_until_idle(absl::Duration limit);

 private:
  int occupied_locked() const;
  int free_locked() const;

  const int slots_;
  mutable std::mutex mutex_;
  std::condition_variable changed_;
  std::map<Key, Attempt> attempts_;
  int promised_ = 0;
  bool closed_ = false;
};

}  // namespace drover::session
