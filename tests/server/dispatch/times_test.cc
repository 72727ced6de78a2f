#include "dispatch/times.h"

#include <gtest/gtest.h>

namespace drover::dispatch {
namespace {

TEST(Times, AreSoundByDefault) { EXPECT_TRUE(Times{}.validate().ok()); }

TEST(Times, MustBeAboveZero) {
  for (absl::Duration Times::*const field :
       {&Times::renew_every, &Times::lease, &Times::grace, &Times::patience, &Times::retry_first, &Times::retry_most,
        &Times::longest_poll, &Times::late}) {
    Times times;
    times.*field = absl::ZeroDuration();
    EXPECT_TRUE(absl::IsInvalidArgument(times.validate()));
  }
}

TEST(Times, LetALeaseOutliveOneLostRenewal) {
  Times times;
  times.renew_every = times.lease / 2;
  EXPECT_TRUE(times.validate().ok());
  times.renew_every += absl::Seconds(1);
  EXPECT_TRUE(absl::IsInvalidArgument(times.validate()));
}

}  // namespace
}  // namespace drover::dispatch
