// Leapfrogging on the peaks function, which has a second valley of -3.049849 that a swarm can end in.
//
// The function and its extrema: the usual documentation of "peaks", extrema verified by solving for the stationary
// points. Common practice, no source: ten players a variable; many more find the global optimum more surely, at a price
// that grows with them.
#include <gtest/gtest.h>

#include "reference/search/trials.h"

namespace drover::search {
namespace {

TEST(Peaks, IsTheFunctionOfTheReference) {
  EXPECT_NEAR(peaks({0, 0}), 0.981011843124, 1e-12);
  EXPECT_NEAR(peaks({0, -3}), -0.244954040574, 1e-12);
  EXPECT_NEAR(peaks({-1, -1}), 1.855891715408, 1e-12);
  EXPECT_NEAR(peaks({0.228278920556, -1.625534957500}), -6.551133332836, 1e-11);
  EXPECT_NEAR(peaks({-1.347396244368, 0.204518866097}), -3.049849402800, 1e-11);
}

TEST(Peaks, HasMoreSuccessWithMorePlayersAtAPriceThatGrowsWithThem) {
  const Trials few = try_out(peaks_problem(), 20, 100), many = try_out(peaks_problem(), 100, 100);
  EXPECT_GE(few.success, 0.6);
  EXPECT_LT(few.success, 1.0) << "some starts end in the second valley";
  EXPECT_GE(many.success, 0.9);
  EXPECT_GT(many.success, few.success);
  // Each player's way to the best takes as many leaps: five times the players, five times the evaluations.
  EXPECT_NEAR(many.evaluations / few.evaluations, 5.0, 1.0);
}

TEST(Peaks, EndsInOneOfItsValleysAndNowhereElse) {
  for (std::uint64_t seed = 1; seed <= 100; ++seed) {
    const double best = *search_once(peaks_problem(), {.method = "leapfrogging", .seed = seed}).best;
    const bool valley = std::abs(best - -6.551133332836) < 1e-3 || std::abs(best - -3.049849402800) < 1e-3;
    EXPECT_TRUE(valley || best > -0.1) << "seed " << seed << " ended at " << best << ", on a slope";
  }
}

TEST(Peaks, IsFoundAsSurelyWithTenPointsOut) {
  const Trials one = try_out(peaks_problem(), 20, 300, 1), ten = try_out(peaks_problem(), 20, 300, 10);
  // Success of 300 starts each: the difference has a standard deviation of 0.035; three of them.
  EXPECT_NEAR(ten.success, one.success, 0.105);
  EXPECT_LT(ten.evaluations, 1.5 * one.evaluations) << "leaps over a best of some time ago cost a little";
}

}  // namespace
}  // namespace drover::search
