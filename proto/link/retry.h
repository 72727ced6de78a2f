// When a call is tried again, and after how long.
#pragma once

#include <cstdint>

#include "absl/status/status.h"
#include "absl/time/time.h"

namespace drover::link {

// UNAVAILABLE, DEADLINE_EXCEEDED, ABORTED and RESOURCE_EXHAUSTED: the same request again, with the same request_id.
bool worth_repeating(const absl::Status& status);

// Waits that double from `first` up to `most`, each drawn uniformly between half and all of it, so that many callers
// do not come back together. Not thread-safe.
class Backoff {
 public:
  explicit Backoff(std::uint64_t seed, absl::Duration first = absl::Milliseconds(200),
                   absl::Duration most = absl::Seconds(20));
  absl::Duration next();
  void reset();  // after a success

 private:
  std::uint64_t state_;
  absl::Duration first_, most_, now_;
};

}  // namespace drover::link
