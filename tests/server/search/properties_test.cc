// What every search method holds to, whatever happens to its candidates.
#include <gtest/gtest.h>

#include <deque>
#include <functional>
#include <limits>
#include <memory>
#include <set>
#include <string>
#include <vector>

#include "server/search/spaces.h"

namespace drover::search {
namespace {

using namespace testing;  // NOLINT: the words of this file

constexpr int kScripts = 200;

Space random_space(Dice& dice) {
  std::vector<Variable> variables;
  const bool discrete = dice.below(3) == 0;
  const int size = 1 + dice.below(4);
  for (int i = 0; i < size; ++i) {
    switch (discrete ? 2 + dice.below(3) : dice.below(5)) {
      case 0:
        variables.push_back(real(-1.0 - dice.unit(), 2.0));
        break;
      case 1:
        variables.push_back(logarithmic(1e-3, 10.0 + dice.unit()));
        break;
      case 2:
        variables.push_back(stepped(0.5, 1.0 + dice.below(20), 0.25));
        break;
      case 3:
        variables.push_back(integer(-2, dice.below(12)));
        break;
      default:
        variables.push_back(choice(1 + dice.below(5)));
    }
  }
  std::vector<double> baseline;
  if (dice.below(2) == 0) baseline.assign(variables.size(), 1.0);
  return make_space(std::move(variables), std::move(baseline));
}

Settings random_settings(const std::string& method, Dice& dice) {
  Settings settings{.method = method, .seed = static_cast<std::uint64_t>(dice.below(1'000'000)), .parallel = 1};
  settings.parallel += dice.below(8);
  if (dice.below(2) == 0) settings.population = 2 + dice.below(12);
  if (dice.below(2) == 0) settings.tolerance = 0.05;
  if (dice.below(2) == 0) settings.share = 0.8;
  return settings;
}

Outcome random_outcome(const Ask& ask, Dice& dice) {
  switch (dice.below(8)) {
    case 0:
      return failed(ask);
    case 1:
      return failed(ask, FailureKind::kLimit);
    case 2:
      return withdrawn(ask);
    case 3:
      return evaluated(ask, bowl(ask.point), dice.unit());
    case 4:
      return {.ask = ask.number, .point = ask.point, .verdict = Verdict::kBounded, .objectives = {1.0}};
    default:
      return evaluated(ask, bowl(ask.point));
  }
}

Outcome foreign(const Space& space, Dice& dice) {
  Outcome outcome{.point = Point(space.size())};
  for (double& x : outcome.point) x = dice.unit();
  outcome.point = space.snap(outcome.point);
  outcome.objectives = {bowl(outcome.point)};
  return outcome;
}

// A method at work: asks out, answered in any order.
struct Script {
  Dice dice;
  Space space;
  Settings settings;
  std::vector<Ask> out = {};

  Script(const std::string& method, std::uint64_t seed)
      : dice(seed), space(random_space(dice)), settings(random_settings(method, dice)) {}

  std::unique_ptr<SearchMethod> fresh() const { return make(space, settings); }

  Ask take_one_out() {
    const auto at = out.begin() + dice.below(static_cast<int>(out.size()));
    const Ask ask = *at;
    out.erase(at);
    return ask;
  }

  Outcome one_outcome() {
    if (out.empty() || dice.below(20) == 0) return foreign(space, dice);
    return random_outcome(take_one_out(), dice);
  }
};

void expect_the_same(const std::vector<Ask>& a, const std::vector<Ask>& b) {
  ASSERT_EQ(a.size(), b.size());
  for (std::size_t i = 0; i < a.size(); ++i) {
    EXPECT_EQ(a[i].number, b[i].number);
    EXPECT_EQ(a[i].point, b[i].point);
    EXPECT_EQ(a[i].purpose, b[i].purpose);
  }
}

class EveryMethod : public ::testing::TestWithParam<std::string> {};
INSTANTIATE_TEST_SUITE_P(Search, EveryMethod, ::testing::ValuesIn(method_names()), [](const auto& test) {
  std::string name = test.param;
  std::erase(name, '-');
  return name;
});

TEST_P(EveryMethod, GoesOnAfterEveryRestartAsIfThereWereNone) {
  for (int seed = 0; seed < kScripts; ++seed) {
    Script script(GetParam(), static_cast<std::uint64_t>(seed));
    auto kept = script.fresh(), restarted = script.fresh();
    for (int event = 0; event < 60; ++event) {
      if (script.dice.below(2) == 0) {
        const int count = script.dice.below(5);
        const auto asks = next(*kept, count);
        expect_the_same(asks, next(*restarted, count));
        script.out.insert(script.out.end(), asks.begin(), asks.end());
      } else {
        const Outcome outcome = script.one_outcome();
        ASSERT_TRUE(kept->learn(outcome).ok());
        ASSERT_TRUE(restarted->learn(outcome).ok());
      }
      auto fresh = script.fresh();
      const absl::Status loaded = fresh->load(restarted->save(), NoHistory());
      ASSERT_TRUE(loaded.ok()) << loaded;
      ASSERT_EQ(fresh->save(), kept->save()) << "seed " << seed << ", event " << event;
      ASSERT_EQ(fresh->progress().sentence, kept->progress().sentence);
      restarted = std::move(fresh);
    }
  }
}

TEST_P(EveryMethod, AsksForTheSameInOneCallAsInTwo) {
  for (int seed = 0; seed < kScripts; ++seed) {
    Script script(GetParam(), static_cast<std::uint64_t>(seed));
    auto at_once = script.fresh(), in_parts = script.fresh();
    for (int event = 0; event < 40; ++event) {
      const int first = script.dice.below(4), second = script.dice.below(4);
      const auto whole = next(*at_once, first + second);
      auto parts = next(*in_parts, first);
      for (Ask& ask : next(*in_parts, second)) parts.push_back(std::move(ask));
      expect_the_same(whole, parts);
      script.out.insert(script.out.end(), whole.begin(), whole.end());
      for (int outcomes = script.dice.below(6); outcomes > 0; --outcomes) {
        const Outcome outcome = script.one_outcome();
        ASSERT_TRUE(at_once->learn(outcome).ok());
        ASSERT_TRUE(in_parts->learn(outcome).ok());
      }
      ASSERT_EQ(at_once->save(), in_parts->save()) << "seed " << seed << ", event " << event;
    }
  }
}

TEST_P(EveryMethod, StaysInsideAndOnStepAndNumbersItsAsksInOrder) {
  for (int seed = 0; seed < kScripts; ++seed) {
    Script script(GetParam(), static_cast<std::uint64_t>(seed));
    auto method = script.fresh();
    std::int64_t number = 0;
    std::set<Point> asked;
    for (int event = 0; event < 80; ++event) {
      for (const Ask& ask : next(*method, script.dice.below(4))) {
        ASSERT_EQ(ask.number, ++number);
        ASSERT_EQ(ask.point.size(), script.space.size());
        ASSERT_EQ(ask.point, script.space.snap(ask.point));
        ASSERT_FALSE(ask.purpose.empty());
        ASSERT_TRUE(asked.insert(ask.point).second) << "asked twice; seed " << seed << ", ask " << number;
        script.out.push_back(ask);
      }
      if (script.dice.below(4) != 0) {
        ASSERT_TRUE(method->learn(script.one_outcome()).ok());
      }
      ASSERT_EQ(method->progress().asked, number);
    }
  }
}

TEST_P(EveryMethod, ChangesNothingWhenItAsksForNothing) {
  int waited = 0;
  for (int seed = 0; seed < kScripts; ++seed) {
    Script script(GetParam(), static_cast<std::uint64_t>(seed));
    auto method = script.fresh();
    for (int event = 0; event < 40; ++event) {
      const std::string before = method->save();
      const auto asks = next(*method, 2 + script.dice.below(20));
      script.out.insert(script.out.end(), asks.begin(), asks.end());
      if (asks.empty()) {
        ++waited;
        ASSERT_EQ(method->save(), before);
        ASSERT_FALSE(method->progress().sentence.empty());
      }
      if (!script.out.empty()) {
        ASSERT_TRUE(method->learn(script.one_outcome()).ok());
      }
    }
  }
  EXPECT_GT(waited, 0);
}

// Of asks 1 (out) and 2 (learned).
std::vector<std::pair<Outcome, absl::StatusCode>> wrong_outcomes(const Ask& out, const Ask& learned) {
  const double nan = std::numeric_limits<double>::quiet_NaN(), infinity = std::numeric_limits<double>::infinity();
  const auto invalid = absl::StatusCode::kInvalidArgument;
  const auto with = [&](auto change) {
    Outcome outcome = evaluated(out, 1.0);
    change(outcome);
    return std::pair(outcome, invalid);
  };
  return {
      {evaluated({.number = 999, .point = out.point}, 1.0), absl::StatusCode::kNotFound},
      {evaluated(learned, 1.0), absl::StatusCode::kAlreadyExists},
      {evaluated({.number = -1, .point = out.point}, 1.0), invalid},
      with([&](Outcome& outcome) { outcome.objectives = {nan}; }),
      with([&](Outcome& outcome) { outcome.objectives = {infinity}; }),
      with([&](Outcome& outcome) { outcome.objectives = {}; }),
      with([&](Outcome& outcome) { outcome.violation = nan; }),
      with([&](Outcome& outcome) { outcome.violation = -1.0; }),
      with([&](Outcome& outcome) { outcome.point.push_back(0.5); }),
      with([&](Outcome& outcome) { outcome.point.clear(); }),
      with([&](Outcome& outcome) { outcome.point[0] = nan; }),
      with([&](Outcome& outcome) { outcome.constraints = {nan}; }),
      with([&](Outcome& outcome) { outcome.variances = {nan}; }),
      with([&](Outcome& outcome) {
        outcome.variances = {1.0, 2.0};
      }),
      with([&](Outcome& outcome) { outcome.verdict = Verdict::kBounded, outcome.objectives = {nan}; }),
  };
}

TEST_P(EveryMethod, RefusesAWrongOutcomeAndStaysAsItWas) {
  for (int seed = 0; seed < kScripts; ++seed) {
    Script script(GetParam(), static_cast<std::uint64_t>(seed));
    if (script.space.discrete() && script.space.count() < 3) continue;
    auto method = script.fresh();
    const auto asks = next(*method, 2);
    ASSERT_EQ(asks.size(), 2u);
    ASSERT_TRUE(method->learn(evaluated(asks[1], 0.5)).ok());
    const std::string before = method->save();
    for (const auto& [outcome, code] : wrong_outcomes(asks[0], asks[1])) {
      EXPECT_EQ(method->learn(outcome).code(), code);
      EXPECT_EQ(method->save(), before);
    }
  }
}

TEST_P(EveryMethod, TakesTheOutcomesOfAWindowInAnyOrder) {
  for (int seed = 0; seed < kScripts; ++seed) {
    Script script(GetParam(), static_cast<std::uint64_t>(seed));
    auto method = script.fresh();
    for (int window = 0; window < 10; ++window) {
      script.out = next(*method, 6);
      const std::int64_t asked = method->progress().asked;
      while (!script.out.empty()) ASSERT_TRUE(method->learn(evaluated(script.take_one_out(), script.dice.unit())).ok());
      EXPECT_EQ(method->progress().learned, asked);
    }
  }
}

// Runs until it ends or 1500 asks are out; the last progress.
Progress run(SearchMethod& method, const std::function<Outcome(const Ask&)>& answer) {
  while (method.progress().asked < 1500) {
    const auto asks = next(method, 3);
    if (asks.empty()) break;  // all outcomes are in: it waits for nothing
    for (const Ask& ask : asks) EXPECT_TRUE(method.learn(answer(ask)).ok());
  }
  return method.progress();
}

std::vector<Space> plain_spaces() {
  return {make_space({real(0, 1), real(0, 1)}),
          make_space({real(0, 1), integer(0, 5), choice(3)}),
          make_space({integer(0, 100), integer(0, 100)}),
          make_space({integer(0, 5), choice(3)}),
          make_space({choice(1)}),
          make_space({integer(3, 3), stepped(1, 1, 0.5)}, {3, 1})};
}

TEST_P(EveryMethod, EndsOrGoesOnWithASentenceWhateverAllOutcomesAre) {
  const std::vector<std::function<Outcome(const Ask&)>> answers = {
      [](const Ask& ask) { return failed(ask); },
      [](const Ask& ask) { return failed(ask, FailureKind::kLimit); },
      [](const Ask& ask) { return withdrawn(ask); },
      [](const Ask& ask) { return evaluated(ask, 1.0, 0.5 + bowl(ask.point)); },
      [](const Ask& ask) { return evaluated(ask, 1.0, 1.0); },
      [](const Ask& ask) { return evaluated(ask, 4.0); },
      [](const Ask& ask) { return evaluated(ask, bowl(ask.point)); },
  };
  for (std::size_t a = 0; a < answers.size(); ++a) {
    for (const Space& space : plain_spaces()) {
      auto method = make(space, {.method = GetParam(), .seed = 5, .parallel = 3});
      const Progress progress = run(*method, answers[a]);
      EXPECT_FALSE(progress.sentence.empty());
      EXPECT_TRUE(progress.converged || progress.asked >= 1500) << "stuck: answers " << a << ": " << progress.sentence;
      EXPECT_EQ(progress.best.has_value(), a >= 5) << progress.sentence;
      if (space.discrete() && space.count() < 100) {
        EXPECT_EQ(progress.asked, space.count());
        EXPECT_TRUE(progress.sentence.starts_with("all " + std::to_string(space.count()) + " designs"))
            << progress.sentence;
      }
    }
  }
}

TEST_P(EveryMethod, AsksForTheBaselineFirst) {
  const Space space = make_space({real(0, 1), integer(0, 10)}, {0.123, 7});
  auto method = make(space, {.method = GetParam()});
  EXPECT_EQ(next(*method, 1).at(0).point, space.baseline());
}

TEST_P(EveryMethod, GivesOtherPointsForAnotherSeedAndTheSameForTheSame) {
  const Space space = make_space({real(0, 1)});
  const auto first = [&](std::uint64_t seed) {
    return next(*make(space, {.method = GetParam(), .seed = seed}), 1).at(0).point;
  };
  EXPECT_EQ(first(1), first(1));
  EXPECT_NE(first(1), first(2));
}

TEST_P(EveryMethod, KeepsAnAmendedSpaceToItsNewBounds) {
  for (int seed = 0; seed < kScripts; ++seed) {
    Dice dice(static_cast<std::uint64_t>(seed));
    const bool whole = seed % 2 == 0;
    const auto of = [&](double low, double high) { return whole ? integer(low, high) : real(low, high); };
    const Space before = make_space({of(0, 40), of(0, 40)}), after = make_space({of(10, 30), of(5, 60)});
    const Settings settings{.method = GetParam(), .seed = static_cast<std::uint64_t>(seed), .parallel = 3};
    auto method = make(before, settings);
    std::set<std::vector<double>> asked;
    std::deque<Ask> out;
    for (int event = 0; event < 120; ++event) {
      if (event == 60) {
        ASSERT_FALSE(method->amend(make_space({of(0, 1)})).ok());
        ASSERT_TRUE(method->amend(after).ok());
      }
      const Space& space = event < 60 ? before : after;
      for (const Ask& ask : next(*method, 2)) {
        ASSERT_EQ(ask.point, space.snap(ask.point));
        ASSERT_TRUE(asked.insert(space.to_user(ask.point)).second) << "asked twice; seed " << seed;
        out.push_back(ask);
      }
      while (out.size() > 3) {
        ASSERT_TRUE(method->learn(evaluated(out.front(), bowl(out.front().point))).ok());
        out.pop_front();
      }
      auto restarted = make(space, settings);
      const absl::Status loaded = restarted->load(method->save(), NoHistory());
      ASSERT_TRUE(loaded.ok()) << loaded;
      ASSERT_EQ(restarted->save(), method->save());
      method = std::move(restarted);
    }
  }
}

TEST_P(EveryMethod, RemembersNoMoreAfterAMillionOutcomes) {
  const Space space = make_space({real(0, 1), real(0, 1), choice(3)});
  auto method = make(space, {.method = GetParam(), .parallel = 4, .tolerance = 1e-300});
  Dice dice(3);
  std::size_t early = 0;
  for (int i = 0; i < 250'000; ++i) {
    const auto asks = next(*method, 4);
    ASSERT_EQ(asks.size(), 4u);
    // Most are withdrawn, so that no swarm closes in on one point in all that time.
    for (const Ask& ask : asks) {
      ASSERT_TRUE(method->learn(dice.below(5000) == 0 ? evaluated(ask, dice.unit()) : withdrawn(ask)).ok());
    }
    if (i == 125'000) early = method->save().size();
  }
  EXPECT_EQ(method->progress().learned, 1'000'000);
  EXPECT_LE(method->save().size(), early + early / 10) << "the numbers of asks are longer, nothing else";
}

}  // namespace
}  // namespace drover::search
