#include "search/space_filling.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <set>
#include <vector>

#include "server/search/spaces.h"

namespace drover::search {
namespace {

using namespace testing;  // NOLINT: the words of this file

TEST(SpaceFilling, LeavesNoPartOfTheSpaceOut) {
  SpaceFilling method(make_space({real(0, 1), real(0, 1)}), {.seed = 5});
  for (const int count : {64, 128}) {  // the first 64, then up to 192: each run of 64 fills all of an 8 x 8 board
    std::vector<int> fields(64);
    for (const Ask& ask : method.next(count, NoHistory())) {
      ++fields[static_cast<std::size_t>(static_cast<int>(ask.point[0] * 8) * 8 + static_cast<int>(ask.point[1] * 8))];
      EXPECT_EQ(ask.purpose, "spread");
    }
    EXPECT_THAT(fields, ::testing::Each(count / 64));
  }
}

TEST(SpaceFilling, LearnsNothingButTheBest) {
  SpaceFilling told(make_space({real(0, 1)}), {.seed = 5}), untold(make_space({real(0, 1)}), {.seed = 5});
  const auto asks = told.next(10, NoHistory());
  untold.next(10, NoHistory());
  for (const Ask& ask : asks)
    ASSERT_TRUE(told.learn(evaluated(ask, bowl(ask.point), ask.number == 1 ? 1.0 : 0.0)).ok());
  EXPECT_EQ(told.next(1, NoHistory()).at(0).point, untold.next(1, NoHistory()).at(0).point);
  double least = 1e9;
  for (const Ask& ask : asks) {
    if (ask.number > 1) least = std::min(least, bowl(ask.point));
  }
  EXPECT_EQ(told.progress().best, least);
  EXPECT_EQ(bowl(told.progress().best_point), least);
  EXPECT_FALSE(told.progress().converged);
  EXPECT_EQ(told.progress().sentence, "spreading out: 10 of 11 points are in");
}

TEST(SpaceFilling, AsksForEveryPointOfADiscreteSpaceOnce) {
  const Space space = make_space({integer(0, 30), choice(4)});
  SpaceFilling method(space, {.seed = 5});
  std::set<Point> points;
  for (const Ask& ask : method.next(1000, NoHistory())) points.insert(ask.point);
  EXPECT_EQ(points.size(), 124u);
  EXPECT_TRUE(method.progress().converged);
  EXPECT_EQ(method.progress().sentence, "all 124 designs have been tried; no feasible design so far");
}

}  // namespace
}  // namespace drover::search
