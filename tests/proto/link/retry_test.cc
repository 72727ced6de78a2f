#include "link/retry.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <set>

namespace drover::link {
namespace {

TEST(WorthRepeating, IsTrueForFourCodesOnly) {
  for (int code = 0; code <= 16; ++code) {
    const auto named = static_cast<absl::StatusCode>(code);
    const bool expected = named == absl::StatusCode::kUnavailable || named == absl::StatusCode::kDeadlineExceeded ||
                          named == absl::StatusCode::kAborted || named == absl::StatusCode::kResourceExhausted;
    EXPECT_EQ(worth_repeating(absl::Status(named, "x")), expected) << code;
  }
}

TEST(Backoff, DoublesUpToItsMostAndStaysBetweenHalfAndAll) {
  for (std::uint64_t seed = 0; seed < 50; ++seed) {
    Backoff backoff(seed, absl::Milliseconds(100), absl::Milliseconds(1000));
    absl::Duration bound = absl::Milliseconds(100);
    for (int i = 0; i < 10; ++i) {
      const absl::Duration wait = backoff.next();
      EXPECT_GE(wait, bound / 2) << "seed " << seed << " wait " << i;
      EXPECT_LE(wait, bound) << "seed " << seed << " wait " << i;
      bound = std::min(bound * 2, absl::Milliseconds(1000));
    }
  }
}

TEST(Backoff, StartsAnewAfterASuccess) {
  Backoff backoff(1, absl::Milliseconds(100), absl::Seconds(10));
  for (int i = 0; i < 8; ++i) backoff.next();
  backoff.reset();
  EXPECT_LE(backoff.next(), absl::Milliseconds(100));
}

TEST(Backoff, SpreadsManyCallers) {
  std::set<absl::Duration> waits;
  for (std::uint64_t seed = 0; seed < 100; ++seed) waits.insert(Backoff(seed).next());
  EXPECT_GT(waits.size(), 90u);
}

}  // namespace
}  // namespace drover::link
