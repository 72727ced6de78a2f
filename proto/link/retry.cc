#include "link/retry.h"

#include <algorithm>

namespace drover::link {
namespace {

// SplitMix64 (Steele, Lea, Flood 2014): enough for spreading waits.
std::uint64_t mix(std::uint64_t& state) {
  state += 0x9e3779b97f4a7c15ull;
  std::uint64_t z = state;
  z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9ull;
  z = (z ^ (z >> 27)) * 0x94d049bb133111ebull;
  return z ^ (z >> 31);
}

}  // namespace

bool worth_repeating(const absl::Status& status) {
  return absl::IsUnavailable(status) || absl::IsDeadlineExceeded(status) || absl::IsAborted(status) ||
         absl::IsResourceExhausted(status);
}

Backoff::Backoff(std::uint64_t seed, absl::Duration first, absl::Duration most)
    : state_(seed), first_(first), most_(most), now_(first) {}

absl::Duration Backoff::next() {
  const double share = 0.5 + 0.5 * static_cast<double>(mix(state_) >> 11) * 0x1.0p-53;
  const absl::Duration wait = now_ * share;
  now_ = std::min(now_ * 2, most_);
  return wait;
}

void Backoff::reset() { now_ = first_; }

}  // namespace drover::link
