#include "link/clock.h"

#include <gtest/gtest.h>

namespace drover::link {
namespace {

TEST(ManualClock, StandsStillUntilItIsMoved) {
  ManualClock clock(absl::FromUnixSeconds(1000));
  EXPECT_EQ(clock.wall(), absl::FromUnixSeconds(1000));
  EXPECT_EQ(clock.steady(), absl::ZeroDuration());
  clock.advance(absl::Seconds(5));
  EXPECT_EQ(clock.wall(), absl::FromUnixSeconds(1005));
  EXPECT_EQ(clock.steady(), absl::Seconds(5));
}

TEST(ManualClock, StepsTheWallClockAlone) {
  ManualClock clock(absl::FromUnixSeconds(1000));
  clock.step_wall(absl::Hours(-1));
  EXPECT_EQ(clock.wall(), absl::FromUnixSeconds(1000 - 3600));
  EXPECT_EQ(clock.steady(), absl::ZeroDuration());
}

TEST(RealClock, NeverGoesBack) {
  const RealClock clock;
  absl::Duration before = clock.steady();
  EXPECT_GT(before, absl::ZeroDuration());
  for (int i = 0; i < 1000; ++i) {
    const absl::Duration now = clock.steady();
    ASSERT_GE(now, before);
    before = now;
  }
  EXPECT_GT(clock.wall(), absl::FromUnixSeconds(1'600'000'000));
}

}  // namespace
}  // namespace drover::link
