#include "search/amended.h"

#include <gtest/gtest.h>

#include "server/search/spaces.h"

namespace drover::search {
namespace {

using testing::choice;
using testing::integer;
using testing::make_space;
using testing::real;
using testing::stepped;

TEST(AmendedSpace, KeepsThePointsThatItStillHas) {
  const Space before = make_space({real(0, 10), integer(1, 5), stepped(0, 1, 0.1), choice(3)});
  const Space after = make_space({real(2, 6), integer(3, 9), stepped(0.3, 0.9, 0.1), choice(3)});
  const Point inside = before.from_user(std::vector<double>{5, 4, 0.7, 2});
  const auto moved = point_in(after, before, inside);
  ASSERT_TRUE(moved.has_value());
  const std::vector<double> values = after.to_user(*moved);
  EXPECT_NEAR(values[0], 5.0, 1e-14);
  EXPECT_EQ(values[1], 4.0);
  EXPECT_NEAR(values[2], 0.7, 1e-15);  // 0.3 + 4 x 0.1 for 0 + 7 x 0.1
  EXPECT_EQ(values[3], 2.0);
}

TEST(AmendedSpace, LosesThePointsOutsideAndOffItsStep) {
  const Space before = make_space({real(0, 10), integer(1, 5), stepped(0, 1, 0.1)});
  const Space after = make_space({real(2, 6), integer(3, 9), stepped(0, 1, 0.25)});
  const auto lost = [&](std::vector<double> values) {
    return !point_in(after, before, before.from_user(values)).has_value();
  };
  EXPECT_FALSE(lost({5, 4, 0.5}));
  EXPECT_TRUE(lost({1, 4, 0.5}));
  EXPECT_TRUE(lost({5, 2, 0.5}));
  EXPECT_TRUE(lost({5, 4, 0.6}));
}

TEST(AmendedSpace, HasTheSameVariables) {
  const Space before = make_space({real(0, 1), choice(3)});
  EXPECT_TRUE(check_amendment(before, make_space({real(-5, 9), choice(3)})).ok());
  EXPECT_FALSE(check_amendment(before, make_space({real(0, 1)})).ok());
  EXPECT_FALSE(check_amendment(before, make_space({integer(0, 1), choice(3)})).ok());
  EXPECT_FALSE(check_amendment(before, make_space({real(0, 1), choice(4)})).ok());
}

}  // namespace
}  // namespace drover::search
