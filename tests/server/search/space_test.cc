#include "search/space.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <set>

#include "server/search/spaces.h"

namespace drover::search {
namespace {

using testing::choice;
using testing::Dice;
using testing::integer;
using testing::logarithmic;
using testing::make_space;
using testing::real;
using testing::stepped;

constexpr double kInfinity = std::numeric_limits<double>::infinity();

TEST(Space, PutsBothBoundsWithinReach) {
  const Space space = make_space({real(0.1, 0.7), logarithmic(1e-3, 3e5), stepped(0.1, 0.4, 0.1), integer(-3, 4)});
  EXPECT_EQ(space.to_user(Point(4, 0.0)), (std::vector<double>{0.1, 1e-3, 0.1, -3}));
  EXPECT_EQ(space.to_user(Point(4, 1.0)), (std::vector<double>{0.7, 3e5, 0.4, 4}));
  const std::vector<double> beyond(4, 1e9), below(4, -1e9);
  EXPECT_EQ(space.to_user(space.from_user(beyond)), space.to_user(Point(4, 1.0)));
  EXPECT_EQ(space.to_user(space.from_user(below)), space.to_user(Point(4, 0.0)));
}

TEST(Space, CountsTheLevelsOfDiscreteVariables) {
  const Space space = make_space({integer(1, 6), stepped(0, 1, 0.1), stepped(0, 1, 0.3), choice(3), integer(5, 5)});
  EXPECT_EQ(space.levels(0), 6);
  EXPECT_EQ(space.levels(1), 11) << "0.1 does not sum up to 1 exactly";
  EXPECT_EQ(space.levels(2), 4) << "0, 0.3, 0.6 and 0.9";
  EXPECT_EQ(space.levels(3), 3);
  EXPECT_EQ(space.levels(4), 1);
  EXPECT_TRUE(space.discrete());
  EXPECT_EQ(space.count(), 6 * 11 * 4 * 3);
  EXPECT_FALSE(make_space({real(0, 1), integer(0, 1)}).discrete());
}

TEST(Space, AddsNoLevelsToAFineStep) {
  // 1e12 steps: a tolerance in proportion to them would find more than there are.
  EXPECT_EQ(make_space({stepped(0, 1e12, 1)}).levels(0), 1'000'000'000'001);
  EXPECT_EQ(make_space({integer(0, 1e15)}).levels(0), 1'000'000'000'000'001);
}

TEST(Space, CountsNoFurtherThanItsNumbersGo) {
  const Space space = make_space(std::vector<Variable>(10, integer(0, 1e9)));
  EXPECT_TRUE(space.discrete());
  EXPECT_EQ(space.count(), std::numeric_limits<std::int64_t>::max());
}

TEST(Space, FindsEachLevelAsOftenInAUniformDraw) {
  const Space space = make_space({integer(1, 6)});
  std::vector<int> found(7);
  for (int i = 0; i < 6000; ++i) ++found[static_cast<std::size_t>(space.to_user(0, (i + 0.5) / 6000.0))];
  for (std::size_t face = 1; face <= 6; ++face) EXPECT_EQ(found[face], 1000);
}

TEST(Space, TakesTheLogarithmWhereAsked) {
  const Space space = make_space({logarithmic(1, 10000)});
  EXPECT_NEAR(space.to_user(0, 0.5), 100.0, 1e-11);  // a few roundings of exp and log
  EXPECT_NEAR(space.from_user(0, 10.0), 0.25, 1e-15);
  // The range itself is more than a double holds.
  const Space wide = make_space({logarithmic(1e-300, 1e300)});
  EXPECT_NEAR(wide.from_user(0, 1.0), 0.5, 1e-15);
}

TEST(Space, GivesBackEveryValueAndEveryPoint) {
  Dice dice(1);
  for (int i = 0; i < 2000; ++i) {
    const double low = dice.unit() * 100.0 - 50.0, high = low + 0.01 + dice.unit() * 100.0;
    const double step = (high - low) / (1 + dice.below(1000));
    const Space space =
        make_space({real(low, high), logarithmic(std::exp(low), std::exp(high)), stepped(low, high, step),
                    integer(std::floor(low), std::ceil(high)), choice(2 + dice.below(20))});
    const Point point = space.snap(Point{dice.unit(), dice.unit(), dice.unit(), dice.unit(), dice.unit()});
    const std::vector<double> values = space.to_user(point);
    const Point back = space.from_user(values);
    for (std::size_t v = 0; v < 5; ++v) {
      // Real ones lose the bits by which the bounds are larger than the range; discrete ones nothing.
      EXPECT_NEAR(back[v], point[v], space.levels(v) == 0 ? 1e-10 : 0.0) << "variable " << v;
    }
    EXPECT_EQ(space.snap(point), point);
    EXPECT_GE(values[2], low);
    EXPECT_LE(values[2], high);
    EXPECT_EQ(values[3], std::round(values[3]));
  }
}

TEST(Space, TellsAllLevelsApartUpToTheMostThereMayBe) {
  const double most = std::exp2(50) - 1;
  const Space space = make_space({integer(0, most - 1)});
  Dice dice(2);
  for (int i = 0; i < 10000; ++i) {
    const auto level = static_cast<std::int64_t>(dice.unit() * most);
    ASSERT_EQ(space.level(0, space.at_level(0, level)), level);
  }
  EXPECT_EQ(space.level(0, space.at_level(0, space.levels(0) - 1)), space.levels(0) - 1);
  EXPECT_FALSE(Space::make({integer(0, std::exp2(51))}).ok());
}

TEST(Space, SnapsToTheNearestPoint) {
  const Space space = make_space({real(0, 1), integer(0, 1)});
  EXPECT_EQ(space.snap(Point{-0.5, 0.1}), (Point{0.0, 0.25}));
  EXPECT_EQ(space.snap(Point{1.5, 0.6}), (Point{1.0, 0.75}));
}

TEST(Space, PutsTheBaselineInsideAndOnItsStep) {
  const Space space = make_space({real(0, 1), stepped(0, 1, 0.25), choice(3)}, {2.0, 0.6, 1.0});
  EXPECT_EQ(space.to_user(space.baseline()), (std::vector<double>{1.0, 0.5, 1.0}));
  EXPECT_TRUE(make_space({real(0, 1)}).baseline().empty());
}

TEST(Space, RefusesWhatIsNoSpace) {
  const std::vector<std::vector<Variable>> wrong = {
      {},
      {real(1, 1)},
      {real(2, 1)},
      {real(0, kInfinity)},
      {real(std::nan(""), 1)},
      {real(-1.7e308, 1.7e308)},
      {logarithmic(0, 1)},
      {logarithmic(-1, 1)},
      {stepped(0, 1, 0)},
      {stepped(0, 1, -0.1)},
      {stepped(0, 1, kInfinity)},
      {stepped(0, 1, 1e-300)},
      {stepped(1, 0, 0.1)},
      {integer(0.5, 3)},
      {integer(3, 0)},
      {choice(0)},
      {{.kind = Kind::kInteger, .low = 1, .high = 9, .scale = Scale::kLog}},
  };
  for (std::size_t i = 0; i < wrong.size(); ++i) {
    EXPECT_EQ(Space::make(wrong[i]).status().code(), absl::StatusCode::kInvalidArgument) << "number " << i;
  }
  EXPECT_FALSE(Space::make({real(0, 1)}, {0.5, 0.5}).ok()) << "a baseline of another size";
  EXPECT_FALSE(Space::make({real(0, 1)}, {std::nan("")}).ok());
}

TEST(Space, HasAFingerprintOfEverythingThatItIs) {
  const std::vector<Space> spaces = {
      make_space({real(0, 1)}),          make_space({real(0, 2)}),        make_space({real(0, 1), real(0, 1)}),
      make_space({logarithmic(1, 2)}),   make_space({real(1, 2)}),        make_space({stepped(0, 1, 0.5)}),
      make_space({stepped(0, 1, 0.25)}), make_space({integer(0, 1)}),     make_space({choice(2)}),
      make_space({choice(3)}),           make_space({real(0, 1)}, {0.5}), make_space({real(0, 1)}, {0.25}),
  };
  std::set<std::string> fingerprints;
  for (const Space& space : spaces) fingerprints.insert(space.fingerprint());
  EXPECT_EQ(fingerprints.size(), spaces.size());
  EXPECT_EQ(make_space({real(0, 1)}, {0.5}).fingerprint(), make_space({real(0, 1)}, {0.5}).fingerprint());
}

TEST(Space, GivesTheBaselineItsOwnNumbers) {
  // 8 on a logarithm from 3 to 30 is no exact coordinate.
  const auto space =
      Space::make({{.low = 3.0, .high = 30.0, .scale = Scale::kLog}, {.low = 0.35, .high = 0.8}}, {8.0, 0.5});
  ASSERT_TRUE(space.ok());
  EXPECT_EQ(space->to_user(space->baseline()), (std::vector<double>{8.0, 0.5}));
}

}  // namespace
}  // namespace drover::search
