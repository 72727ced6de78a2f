#include "study/scoring.h"

#include <gtest/gtest.h>

#include <vector>

namespace drover::study {
namespace {

v1::Constraint limit(double at_most, double allowance) {
  v1::Constraint constraint;
  constraint.set_at_most(at_most);
  constraint.set_allowance(allowance);
  return constraint;
}

TEST(Scoring, MovesLimitsToTheSafeSide) {
  EXPECT_DOUBLE_EQ(tightened(limit(1.6, 0.05)).high, 1.52);
  EXPECT_DOUBLE_EQ(tightened(limit(-2.0, 0.05)).high, -2.1);
  v1::Constraint least;
  least.set_at_least(10.0);
  least.set_allowance(0.05);
  EXPECT_DOUBLE_EQ(tightened(least).low, 10.5);
}

TEST(Scoring, MeasuresHowFarAValueLiesOutside) {
  EXPECT_DOUBLE_EQ(excess({.low = 1.0, .high = 3.0}, 3.5), 0.5);
  EXPECT_DOUBLE_EQ(excess({.low = 1.0, .high = 3.0}, 0.0), 1.0);
  EXPECT_DOUBLE_EQ(excess({.low = 1.0, .high = 3.0}, 1.5), -0.5);
}

TEST(Scoring, DividesByTheLimitsSizeUnlessItIsZero) {
  EXPECT_DOUBLE_EQ(usual_scale(limit(-4.0, 0.0)), 4.0);
  EXPECT_DOUBLE_EQ(usual_scale(limit(0.0, 0.0)), 1.0);
}

TEST(Scoring, TakesTheWeightedMean) {
  EXPECT_DOUBLE_EQ(weighted_mean(std::vector<double>{1, 2, 4}, std::vector<double>{0.5, 0.25, 0.25}), 2.0);
}

TEST(Scoring, TakesTheWorstByTheSense) {
  const std::vector<double> values = {1, 5, 3};
  EXPECT_EQ(worst(values, v1::SENSE_MINIMISE), 5);
  EXPECT_EQ(worst(values, v1::SENSE_MAXIMISE), 1);
}

TEST(Scoring, CountsQuantilesFromTheBadSide) {
  const std::vector<double> values = {1, 2, 3, 4}, weights = {0.25, 0.25, 0.25, 0.25};
  // Definition 1 of Hyndman and Fan (1996): the inverse of the empirical distribution.
  EXPECT_EQ(weighted_quantile(values, weights, 0.25, v1::SENSE_MINIMISE), 4);
  EXPECT_EQ(weighted_quantile(values, weights, 0.26, v1::SENSE_MINIMISE), 3);
  EXPECT_EQ(weighted_quantile(values, weights, 0.25, v1::SENSE_MAXIMISE), 1);
  EXPECT_EQ(weighted_quantile(values, weights, 0.99, v1::SENSE_MINIMISE), 1);
}

}  // namespace
}  // namespace drover::study
