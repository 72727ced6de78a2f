#include "session/roster.h"

#include <gtest/gtest.h>

#include <thread>

namespace drover::session {
namespace {

v1::Grant grant(std::int64_t run, std::int64_t fence = 1) {
  v1::Grant made;
  made.set_run(run);
  made.set_fence(fence);
  return made;
}

TEST(Roster, TakesEachAttemptOnce) {
  Roster roster(2);
  EXPECT_TRUE(roster.accept(grant(7), absl::Seconds(1)));
  EXPECT_FALSE(roster.accept(grant(7), absl::Seconds(2)));
  EXPECT_TRUE(roster.accept(grant(7, 2), absl::Seconds(2))) << "another attempt at the same run";
  EXPECT_EQ(roster.find({7, 1})->since, absl::Seconds(1));
  EXPECT_FALSE(roster.find({8, 1}).has_value());
}

TEST(Roster, PromisesEverySlotOnce) {
  Roster roster(3);
  roster.accept(grant(1), absl::ZeroDuration());
  EXPECT_EQ(roster.promise(), 2);
  EXPECT_EQ(roster.promise(), 0) << "both are asked for already";
  roster.accept(grant(2), absl::ZeroDuration());
  roster.release(2);
  EXPECT_EQ(roster.promise(), 1);
}

TEST(Roster, GivesASlotFreeWhenTheReportIsInTheSpool) {
  Roster roster(1);
  roster.accept(grant(1), absl::ZeroDuration());
  roster.begun({1, 1}, absl::Seconds(1));
  roster.ended({1, 1});
  EXPECT_EQ(roster.promise(), 0) << "its outputs are still being read";
  roster.ready({1, 1});
  EXPECT_EQ(roster.promise(), 1);
  EXPECT_TRUE(roster.find({1, 1}).has_value()) << "not acknowledged yet";
  roster.forget({1, 1});
  EXPECT_FALSE(roster.find({1, 1}).has_value());
}

TEST(Roster, NeverPromisesMoreThanItHasAfterARecovery) {
  Roster roster(1);
  for (int run = 1; run <= 3; ++run) roster.accept(grant(run), absl::ZeroDuration());
  EXPECT_EQ(roster.promise(), 0);
  EXPECT_EQ(roster.occupied(), 3);
}

TEST(Roster, PromisesNothingOnceClosed) {
  Roster roster(4);
  roster.close();
  EXPECT_EQ(roster.promise(), 0);
  roster.wait_for_slot(absl::Hours(1));  // comes back at once
}

TEST(Roster, AsksEachAttemptToStopOnce) {
  Roster roster(2);
  roster.accept(grant(1), absl::ZeroDuration());
  EXPECT_TRUE(roster.ask_stop({1, 1}, "the study ended"));
  EXPECT_FALSE(roster.ask_stop({1, 1}, "again"));
  EXPECT_EQ(roster.find({1, 1})->stop_reason, "the study ended");
  EXPECT_FALSE(roster.ask_stop({2, 1}, "unknown here"));
  roster.accept(grant(3), absl::ZeroDuration());
  roster.ended({3, 1});
  EXPECT_FALSE(roster.ask_stop({3, 1}, "too late"));
}

TEST(Roster, WakesWhoWaitsForASlotOrForQuiet) {
  Roster roster(1);
  roster.accept(grant(1), absl::ZeroDuration());
  EXPECT_FALSE(roster.wait_until_idle(absl::Milliseconds(1)));
  std::thread later([&] {
    roster.ready({1, 1});
    roster.wake();
  });
  roster.wait_for_slot(absl::Hours(1));
  EXPECT_TRUE(roster.wait_until_idle(absl::Hours(1)));
  later.join();
}

}  // namespace
}  // namespace drover::session
