#include "link/retry.h"

#include <algorithm>

namespace drover::link {
namespace {

// Steele, Lea and Flood (2014), "Fast splittable pseudorandom number generators", OOPSLA: the SplitMix64 step.
std::uint64_t next_draw(std::uint64_t& state) {
  state += 0x9E3779B97F4A7C15ull;
  std::uint64_t z = state;
  z = (z ^ (z >> 30)) * 0xBF58476D1CE4E5B9ull;
  z = (z ^ (z >> 27)) * 0x94D049BB133111EBull;
  return z ^ (z >> 31);
}

}  // namespace

bool worth_repeating(const absl::Status& status) {
  switch (status.code()) {
    case absl::StatusCode::kUnavailable:
    case absl::StatusCode::kDeadlineExceeded:
    case absl::StatusCode::kAborted:
    case absl::StatusCode::kResourceExhausted:
      return true;
    default:
      return false;
  }
}

Backoff::Backoff(std::uint64_t seed, absl::Duration first, absl::Duration most)
    : state_(seed), first_(first), most_(most), now_(first) {}

absl::Duration Backoff::next() {
  const double share = static_cast<double>(next_draw(state_) >> 11) * 0x1p-53;  // [0, 1)
  const absl::Duration wait = now_ * (0.5 + 0.5 * share);
  now_ = std::min(now_ * 2, most_);
  return wait;
}

void Backoff::reset() { now_ = first_; }

}  // namespace drover::link
