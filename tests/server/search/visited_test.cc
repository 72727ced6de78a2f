#include "search/visited.h"

#include <gtest/gtest.h>

#include "server/search/spaces.h"

namespace drover::search {
namespace {

using testing::choice;
using testing::integer;
using testing::make_space;
using testing::real;

Point at(const Space& space, std::vector<double> values) { return space.from_user(values); }

TEST(Visited, TakesTheFirstDrawThatIsNew) {
  const Space space = make_space({integer(0, 9)});
  Visited visited(space);
  visited.add(at(space, {4}));
  int drawn = 0;
  const auto fresh = visited.fresh([&](int attempt) {
    ++drawn;
    return at(space, {attempt == 0 ? 4.0 : 7.0});
  });
  EXPECT_EQ(fresh, at(space, {7}));
  EXPECT_EQ(drawn, 2);
}

TEST(Visited, TakesTheNearestNewPointWhenAllDrawsAreOld) {
  const Space space = make_space({integer(0, 99), integer(0, 99)});
  Visited visited(space);
  for (double x = 48; x <= 52; ++x) {
    for (double y = 48; y <= 52; ++y) visited.add(at(space, {x, y}));
  }
  const auto fresh = visited.fresh([&](int) { return at(space, {51, 50}); });
  EXPECT_EQ(fresh, at(space, {53, 50})) << "two steps away; all others are three";
}

TEST(Visited, CountsEveryOtherChoiceAsNear) {
  const Space space = make_space({choice(5)});
  Visited visited(space);
  for (double old : {0.0, 1.0, 2.0, 3.0}) visited.add(at(space, {old}));
  EXPECT_EQ(visited.fresh([&](int) { return at(space, {0}); }), at(space, {4}));
}

TEST(Visited, FindsTheLastPointOfALargeSpaceHoweverFarItIs) {
  const Space space = make_space({integer(0, 99), integer(0, 99)});
  Visited visited(space);
  for (double x = 0; x <= 99; ++x) {
    for (double y = 0; y <= 99; ++y) {
      if (x != 3 || y != 96) visited.add(at(space, {x, y}));
    }
  }
  EXPECT_FALSE(visited.full());
  EXPECT_EQ(visited.fresh([&](int) { return at(space, {90, 5}); }), at(space, {3, 96}));
  visited.add(at(space, {3, 96}));
  EXPECT_TRUE(visited.full());
  EXPECT_EQ(visited.fresh([&](int) { return at(space, {90, 5}); }), std::nullopt);
}

TEST(Visited, KeepsNothingOfASpaceWithARealVariable) {
  const Space space = make_space({real(0, 1), integer(0, 1)});
  Visited visited(space);
  visited.add(Point{0.5, 0.25});
  EXPECT_FALSE(visited.contains(Point{0.5, 0.25}));
  EXPECT_FALSE(visited.full());
  EXPECT_EQ(visited.save(), "");
  EXPECT_EQ(Visited::load(space, "x").status().code(), absl::StatusCode::kDataLoss);
}

TEST(Visited, IsSavedInTheSameBytesWhateverTheOrder) {
  const Space space = make_space({integer(0, 1'000'000), choice(3)});
  Visited a(space), b(space);
  const std::vector<std::vector<double>> values = {{5, 0}, {999'999, 2}, {128, 1}, {127, 2}};
  for (std::size_t i = 0; i < values.size(); ++i) {
    a.add(at(space, values[i]));
    b.add(at(space, values[values.size() - 1 - i]));
  }
  EXPECT_EQ(a.save(), b.save());
  const auto loaded = Visited::load(space, a.save());
  ASSERT_TRUE(loaded.ok()) << loaded.status();
  EXPECT_EQ(loaded->save(), a.save());
  for (const auto& one : values) EXPECT_TRUE(loaded->contains(at(space, one)));
  EXPECT_FALSE(loaded->contains(at(space, {6, 0})));
}

TEST(Visited, RefusesBytesOfPointsThatTheSpaceHasNot) {
  const Space space = make_space({integer(0, 9), integer(0, 9)});
  for (const std::string& bytes : {std::string("\x01", 1), std::string("\x01\x0a", 2), std::string("\x01\x80", 2),
                                   std::string("\xff\xff\xff\xff\xff\xff\xff\xff\xff\xff\xff\x01", 12)}) {
    EXPECT_EQ(Visited::load(space, bytes).status().code(), absl::StatusCode::kDataLoss);
  }
}

TEST(Visited, MovesToAmendedBounds) {
  const Space before = make_space({integer(0, 9)}), after = make_space({integer(5, 20)});
  Visited visited(before);
  for (double old : {3.0, 5.0, 9.0}) visited.add(at(before, {old}));
  const Visited moved = visited.in(after);
  EXPECT_TRUE(moved.contains(at(after, {5})));
  EXPECT_TRUE(moved.contains(at(after, {9})));
  EXPECT_EQ(moved.save().size(), 2u);
}

}  // namespace
}  // namespace drover::search
