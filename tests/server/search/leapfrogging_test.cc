#include "search/leapfrogging.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <functional>
#include <iterator>
#include <map>
#include <vector>

#include "server/search/spaces.h"

namespace drover::search {
namespace {

using namespace testing;  // NOLINT: the words of this file

Settings of(int population, std::uint64_t seed = 1) {
  return {.method = "leapfrogging", .seed = seed, .population = population};
}

// A swarm on one line, standing where it is put: its players are given an objective each.
class OneLine {
 public:
  // Every start point's objective from where it stands.
  OneLine(const Space& space, const Settings& settings, const std::function<double(double)>& objective)
      : method_(space, settings) {
    for (const Ask& ask : method_.next(1000, NoHistory())) {
      places_[objective(ask.point[0])] = ask.point[0];
      EXPECT_TRUE(method_.learn(evaluated(ask, objective(ask.point[0]))).ok());
    }
  }
  Leapfrogging& method() { return method_; }
  double best() const { return places_.begin()->second; }
  double worst(int nth = 0) const { return std::prev(places_.end(), nth + 1)->second; }

 private:
  Leapfrogging method_;
  std::map<double, double> places_;  // by objective
};

// Whether x is in the box that mirrors `worst` through `best`, clipped to the bounds.
bool mirrored(double x, double worst, double best) {
  const double far = std::clamp(2.0 * best - worst, 0.0, 1.0);
  return x >= std::min(best, far) && x <= std::max(best, far);
}

double valley(double x) { return std::abs(x - 0.4); }

TEST(Leapfrogging, HasTenPlayersAVariableAndTwiceAsManyAsAreOut) {
  const Space space = make_space({real(0, 1), real(0, 1)});
  const auto players = [](const Space& of_space, Settings settings) {
    return Leapfrogging(of_space, settings).population();
  };
  EXPECT_EQ(players(space, {.parallel = 1}), 20);
  EXPECT_EQ(players(space, {.parallel = 10}), 20);
  EXPECT_EQ(players(space, {.parallel = 30}), 60);
  EXPECT_EQ(players(space, {.parallel = 30, .population = 100}), 100);
  EXPECT_EQ(players(make_space({integer(1, 3), choice(2)}), {}), 6) << "no more than there are points";
}

TEST(Leapfrogging, SendsEveryPlayerToAStartBeforeTheFirstLeap) {
  Leapfrogging method(make_space({real(0, 1)}), of(8));
  const auto starts = method.next(100, NoHistory());
  ASSERT_EQ(starts.size(), 8u);
  std::vector<int> eighths;
  for (const Ask& ask : starts) {
    EXPECT_EQ(ask.purpose, "start");
    eighths.push_back(static_cast<int>(ask.point[0] * 8.0));
  }
  EXPECT_THAT(eighths, ::testing::UnorderedElementsAre(0, 1, 2, 3, 4, 5, 6, 7)) << "spread evenly";
  EXPECT_THAT(method.progress().sentence, ::testing::HasSubstr("waiting for 8 outcomes"));
}

TEST(Leapfrogging, LetsTheWorstLeapOverTheBestIntoTheMirroredBox) {
  for (std::uint64_t seed = 0; seed < 300; ++seed) {
    OneLine line(make_space({real(0, 1)}), of(8, seed), valley);
    const auto leaps = line.method().next(1, NoHistory());
    ASSERT_EQ(leaps.size(), 1u);
    EXPECT_EQ(leaps[0].purpose, "leap");
    EXPECT_TRUE(mirrored(leaps[0].point[0], line.worst(), line.best())) << leaps[0].point[0];
  }
}

TEST(Leapfrogging, SendsAsManyOfTheWorstAsAreAskedForButNeverTheBest) {
  for (std::uint64_t seed = 0; seed < 100; ++seed) {
    OneLine line(make_space({real(0, 1)}), of(8, seed), valley);
    const auto leaps = line.method().next(100, NoHistory());
    ASSERT_EQ(leaps.size(), 7u) << "all but the best";
    for (int nth = 0; nth < 7; ++nth) {
      EXPECT_TRUE(mirrored(leaps[static_cast<std::size_t>(nth)].point[0], line.worst(nth), line.best())) << nth;
    }
    EXPECT_TRUE(line.method().next(1, NoHistory()).empty());
  }
}

TEST(Leapfrogging, DrawsTheLeapUniformlyFromTheWholeBox) {
  // r = (best - x) / (worst - best) over 4000 seeds; ten cells of 400, standard deviation 19, five of them either way.
  std::vector<int> cells(10);
  for (std::uint64_t seed = 0; seed < 4000; ++seed) {
    OneLine line(make_space({real(0, 1)}), of(8, seed), [](double x) { return std::abs(x - 0.5); });
    const double far = std::clamp(2.0 * line.best() - line.worst(), 0.0, 1.0);
    const double r = (line.best() - line.method().next(1, NoHistory()).at(0).point[0]) / (line.best() - far);
    ASSERT_TRUE(r >= 0.0 && r < 1.0) << r;
    ++cells[static_cast<std::size_t>(r * 10.0)];
  }
  for (const int count : cells) EXPECT_NEAR(count, 400, 95);
}

TEST(Leapfrogging, ClipsTheBoxBeforeTheDrawSoThatNoPileFormsOnAnEdge) {
  // The best is near the upper bound and the worst far from it: most of the unclipped box is outside. Clipped after the
  // draw, most leaps would land on 1 exactly; clipped before it none does, and they are spread over what is left.
  int on_edge = 0, upper_half = 0;
  constexpr int kSeeds = 1000;
  for (std::uint64_t seed = 0; seed < kSeeds; ++seed) {
    OneLine line(make_space({real(0, 1)}), of(8, seed), [](double x) { return std::abs(x - 0.9); });
    const double x = line.method().next(1, NoHistory()).at(0).point[0];
    if (x >= 1.0) ++on_edge;
    if (x > (line.best() + 1.0) / 2.0) ++upper_half;
  }
  EXPECT_EQ(on_edge, 0);
  EXPECT_NEAR(upper_half, kSeeds / 2, 80);  // five standard deviations of a fair coin
}

TEST(Leapfrogging, LeapsBetweenTheTwoWhenTheBestStandsOnTheBound) {
  const Space space = make_space({real(0, 1)}, {1.0});
  OneLine line(space, of(8), [](double x) { return 1.0 - x; });
  ASSERT_EQ(line.best(), 1.0);
  const double x = line.method().next(1, NoHistory()).at(0).point[0];
  EXPECT_GT(x, line.worst());
  EXPECT_LT(x, 1.0);
}

TEST(Leapfrogging, KeepsALandingBetterOrWorse) {
  OneLine line(make_space({real(0, 1)}), of(8), valley);
  const Ask leap = line.method().next(1, NoHistory()).at(0);
  ASSERT_TRUE(line.method().learn(evaluated(leap, 100.0)).ok());
  const Ask next = line.method().next(1, NoHistory()).at(0);
  EXPECT_TRUE(mirrored(next.point[0], leap.point[0], line.best())) << "from where it landed, now the worst of all";
}

TEST(Leapfrogging, LeapsAgainFromWhereItFailed) {
  for (const bool fails : {true, false}) {
    OneLine line(make_space({real(0, 1)}), of(8), valley);
    const Ask leap = line.method().next(1, NoHistory()).at(0);
    ASSERT_TRUE(line.method().learn(fails ? failed(leap) : evaluated(leap, -5.0, 0.1)).ok());
    const Ask next = line.method().next(1, NoHistory()).at(0);
    EXPECT_TRUE(mirrored(next.point[0], leap.point[0], line.best()));
    EXPECT_FALSE(mirrored(next.point[0], line.worst(), line.best())) << "it no longer stands where it did";
  }
}

TEST(Leapfrogging, IsBackAtItsOldPlaceWhenNothingWasLearned) {
  const auto limit = [](const Ask& ask) { return failed(ask, FailureKind::kLimit); };
  const auto bounded = [](const Ask& ask) {
    return Outcome{.ask = ask.number, .point = ask.point, .verdict = Verdict::kBounded, .objectives = {-1.0}};
  };
  for (const std::function<Outcome(const Ask&)>& nothing :
       {std::function<Outcome(const Ask&)>(withdrawn), {limit}, {bounded}}) {
    OneLine line(make_space({real(0, 1)}), of(8), valley);
    const Progress before = line.method().progress();
    const Ask leap = line.method().next(1, NoHistory()).at(0);
    ASSERT_TRUE(line.method().learn(nothing(leap)).ok());
    EXPECT_EQ(line.method().progress().swarm_low, before.swarm_low);
    EXPECT_EQ(line.method().progress().swarm_high, before.swarm_high);
    const Ask next = line.method().next(1, NoHistory()).at(0);
    EXPECT_TRUE(mirrored(next.point[0], line.worst(), line.best()));
    EXPECT_NE(next.point, leap.point) << "another draw";
  }
}

TEST(Leapfrogging, LeapsOverTheLeastInfeasibleWhileNothingIsFeasible) {
  Leapfrogging method(make_space({real(0, 1)}), of(8));
  double best = 0.0, worst = 0.0;
  for (const Ask& ask : method.next(8, NoHistory())) {
    ASSERT_TRUE(method.learn(evaluated(ask, -ask.point[0], 0.1 + ask.point[0])).ok());
    best = worst == 0.0 ? ask.point[0] : std::min(best, ask.point[0]);
    worst = std::max(worst, ask.point[0]);
  }
  EXPECT_TRUE(mirrored(method.next(1, NoHistory()).at(0).point[0], worst, best)) << "not over the smallest objective";
}

TEST(Leapfrogging, ScattersFurtherWhileEverythingFails) {
  Leapfrogging method(make_space({real(0, 1)}), of(8));
  std::vector<int> sixteenths;
  for (int round = 0; round < 16; ++round) {
    const Ask ask = method.next(1, NoHistory()).at(0);
    sixteenths.push_back(static_cast<int>(ask.point[0] * 16.0));
    ASSERT_TRUE(method.learn(failed(ask)).ok());
  }
  std::sort(sixteenths.begin(), sixteenths.end());
  EXPECT_EQ(std::unique(sixteenths.begin(), sixteenths.end()), sixteenths.end()) << "one in each sixteenth";
  EXPECT_THAT(method.progress().sentence, ::testing::HasSubstr("every design failed"));
}

TEST(Leapfrogging, GivesEachItsTurnOnAPlateauAndConverges) {
  Leapfrogging method(make_space({real(0, 1), real(0, 1)}), of(0));
  while (!method.progress().converged) {
    ASSERT_LT(method.progress().asked, 2000) << method.progress().sentence;
    for (const Ask& ask : method.next(1, NoHistory())) ASSERT_TRUE(method.learn(evaluated(ask, 1.0)).ok());
  }
}

// Around a lone good point everything is worse than anywhere else.
TEST(Leapfrogging, IsNotCaughtByALonePoint) {
  Leapfrogging method(make_space({real(0, 1), real(0, 1)}), of(0));
  while (!method.progress().converged) {
    ASSERT_LT(method.progress().asked, 2000) << method.progress().sentence;
    for (const Ask& ask : method.next(1, NoHistory())) {
      ASSERT_TRUE(method.learn(evaluated(ask, ask.number == 1 ? -100.0 : -bowl(ask.point))).ok());
    }
  }
}

TEST(Leapfrogging, ConvergesWhenTheShareOfTheSwarmIsWithinTheTolerance) {
  std::map<double, std::int64_t> asked;
  for (const double share : {1.0, 0.5}) {
    Leapfrogging method(make_space({real(0, 1), real(0, 1)}), {.seed = 3, .tolerance = 0.01, .share = share});
    while (!method.progress().converged) {
      for (const Ask& ask : method.next(1, NoHistory()))
        ASSERT_TRUE(method.learn(evaluated(ask, bowl(ask.point))).ok());
    }
    const Progress progress = method.progress();
    asked[share] = progress.asked;
    const double side =
        std::max(progress.swarm_high[0] - progress.swarm_low[0], progress.swarm_high[1] - progress.swarm_low[1]);
    EXPECT_EQ(side < 0.01, share == 1.0) << "the whole swarm's box";
    EXPECT_NEAR(progress.best_point[0], 0.3, 0.01);
    EXPECT_NEAR(progress.best_point[1], 0.3, 0.01);
    EXPECT_TRUE(method.next(5, NoHistory()).empty());
    EXPECT_THAT(progress.sentence, ::testing::StartsWith("converged"));
  }
  EXPECT_LT(asked[0.5], asked[1.0]);
}

TEST(Leapfrogging, FindsTheBestChoiceAndTheBestLevels) {
  const Space space = make_space({real(0, 1), integer(0, 50), choice(4)});
  int found = 0;
  for (std::uint64_t seed = 0; seed < 50; ++seed) {
    Leapfrogging method(space, {.seed = seed, .parallel = 4});
    while (!method.progress().converged && method.progress().asked < 5000) {
      for (const Ask& ask : method.next(4, NoHistory())) {
        const std::vector<double> values = space.to_user(ask.point);
        const double level = (values[1] - 33) / 50, other = values[2] == 2 ? 0.0 : 0.3;
        ASSERT_TRUE(method.learn(evaluated(ask, std::pow(values[0] - 0.7, 2) + level * level + other)).ok());
      }
    }
    const std::vector<double> best = space.to_user(method.progress().best_point);
    if (best[1] == 33 && best[2] == 2) ++found;
  }
  EXPECT_GE(found, 45) << "of 50; a swarm may lose a level before it knows its worth";
}

TEST(Leapfrogging, StopsInALargeDiscreteSpaceWhenNothingBetterIsFound) {
  const Space space = make_space({integer(0, 999), integer(0, 999)});
  Leapfrogging method(space, {.seed = 2});
  while (!method.progress().converged) {
    ASSERT_LT(method.progress().asked, 5000);
    for (const Ask& ask : method.next(3, NoHistory())) ASSERT_TRUE(method.learn(evaluated(ask, bowl(ask.point))).ok());
  }
  const std::vector<double> best = space.to_user(method.progress().best_point);
  EXPECT_NEAR(best[0], 300, 1);  // 0.3 of the range lies between levels 299 and 300
  EXPECT_NEAR(best[1], 300, 1);
  EXPECT_THAT(method.progress().sentence, ::testing::StartsWith("converged: nothing better in the last"));
}

TEST(Leapfrogging, TakesABetterPointFromElsewhere) {
  OneLine line(make_space({real(0, 1)}), of(8), valley);
  ASSERT_TRUE(line.method().learn({.point = {0.77}, .objectives = {-9.0}}).ok());
  EXPECT_EQ(line.method().progress().best_point, Point{0.77});
  const double before = *line.method().progress().best;
  ASSERT_TRUE(line.method().learn({.point = {0.5}, .objectives = {1e9}}).ok());
  ASSERT_TRUE(line.method().learn({.point = {0.6}, .verdict = Verdict::kFailed}).ok());
  EXPECT_EQ(line.method().progress().best, before);
  EXPECT_TRUE(mirrored(line.method().next(1, NoHistory()).at(0).point[0], line.worst(1), 0.77)) << "the worst gave way";
}

TEST(Leapfrogging, StartsEvenlySpreadHoweverManyPointsCameFromElsewhere) {
  Leapfrogging method(make_space({real(0, 1)}), of(8));
  for (int i = 0; i < 100; ++i) {
    ASSERT_TRUE(method.learn({.point = {0.4 + 0.001 * i}, .objectives = {100.0 - i}}).ok());
  }
  EXPECT_EQ(method.progress().best, 1.0);
  EXPECT_GE(method.next(6, NoHistory()).size(), 6u);
}

}  // namespace
}  // namespace drover::search
