// Saved states that were cut, changed, or are of something else.
#include <gtest/gtest.h>

#include <string>
#include <vector>

#include "server/search/spaces.h"

namespace drover::search {
namespace {

using namespace testing;  // NOLINT: the words of this file

class EveryState : public ::testing::TestWithParam<std::string> {
 protected:
  // Some way on: asks out, outcomes of several kinds in.
  std::unique_ptr<SearchMethod> at_work(const Space& space) const {
    auto method = fresh(space);
    for (int round = 0; round < 12; ++round) {
      const auto asks = next(*method, 3);
      const std::size_t left_out = round < 10 ? 0 : 1;
      for (std::size_t i = 0; i + left_out < asks.size(); ++i) {
        EXPECT_TRUE(method->learn(i == 0 ? evaluated(asks[i], bowl(asks[i].point)) : failed(asks[i])).ok());
      }
    }
    return method;
  }
  std::unique_ptr<SearchMethod> fresh(const Space& space) const {
    return make(space, {.method = GetParam(), .seed = 11, .population = 8});
  }
  // Tries to load it over a method at work: refused, which stays as it was.
  void expect_refused(const std::string& bytes, SearchMethod& method, const std::string& why) const {
    const std::string before = method.save();
    const absl::Status loaded = method.load(bytes, NoHistory());
    EXPECT_TRUE(absl::IsDataLoss(loaded) || absl::IsInvalidArgument(loaded)) << why << ": " << loaded;
    ASSERT_EQ(method.save(), before) << why;
  }
  const std::vector<Space> spaces_ = {make_space({real(0, 1), choice(3)}), make_space({integer(0, 30), choice(3)})};
};
INSTANTIATE_TEST_SUITE_P(Search, EveryState, ::testing::ValuesIn(method_names()), [](const auto& test) {
  std::string name = test.param;
  std::erase(name, '-');
  return name;
});

TEST_P(EveryState, IsRefusedWhenItIsCut) {
  for (const Space& space : spaces_) {
    auto method = at_work(space);
    const std::string state = method->save();
    for (std::size_t length = 0; length < state.size(); ++length) {
      expect_refused(state.substr(0, length), *method, "cut to " + std::to_string(length));
    }
    expect_refused(state + '\0', *method, "one byte more");
    expect_refused(state + state, *method, "twice");
  }
}

TEST_P(EveryState, IsRefusedWhenABitIsFlipped) {
  for (const Space& space : spaces_) {
    auto method = at_work(space);
    const std::string state = method->save();
    for (std::size_t bit = 0; bit < 8 * state.size(); ++bit) {
      std::string flipped = state;
      flipped[bit / 8] = static_cast<char>(flipped[bit / 8] ^ (1 << (bit % 8)));
      expect_refused(flipped, *method, "bit " + std::to_string(bit));
    }
  }
}

TEST_P(EveryState, IsRefusedWhenBytesAreChanged) {
  Dice dice(4);
  auto method = at_work(spaces_[0]);
  const std::string state = method->save();
  for (int i = 0; i < 2000; ++i) {
    std::string changed = state;
    const int from = dice.below(static_cast<int>(state.size()));
    for (int n = 1 + dice.below(8); n > 0; --n) {
      changed[static_cast<std::size_t>((from + n) % static_cast<int>(state.size()))] =
          static_cast<char>(dice.below(256));
    }
    if (changed != state) expect_refused(changed, *method, "change " + std::to_string(i));
  }
}

TEST_P(EveryState, IsOfItsMethodSpaceAndSettingsOnly) {
  const Space space = spaces_[0];
  const std::string state = at_work(space)->save();
  const Settings own{.method = GetParam(), .seed = 11, .population = 8};
  const auto expect_foreign = [&](const Space& other, const Settings& settings, const char* why) {
    auto method = make(other, settings);
    EXPECT_EQ(method->load(state, NoHistory()).code(), absl::StatusCode::kInvalidArgument) << why;
  };
  const auto changed = [&](auto change) {
    Settings settings = own;
    change(settings);
    return settings;
  };
  expect_foreign(make_space({real(0, 2), choice(3)}), own, "space");
  expect_foreign(space, changed([](Settings& settings) { settings.seed = 12; }), "seed");
  expect_foreign(space, changed([](Settings& settings) { settings.population = 9; }), "population");
  expect_foreign(space, changed([](Settings& settings) { settings.tolerance = 0.5; }), "tolerance");
  expect_foreign(space, changed([](Settings& settings) { settings.share = 0.5; }), "share");
  for (const std::string& name : method_names()) {
    if (name != GetParam())
      expect_foreign(space, changed([&](Settings& settings) { settings.method = name; }), "method");
  }
}

TEST_P(EveryState, OutlivesAnotherNumberOfWorkers) {
  auto method = at_work(spaces_[0]);
  auto more = make(spaces_[0], {.method = GetParam(), .seed = 11, .parallel = 50, .population = 8});
  ASSERT_TRUE(more->load(method->save(), NoHistory()).ok());
  EXPECT_EQ(more->save(), method->save());
  EXPECT_EQ(next(*more, 1).at(0).point, next(*method, 1).at(0).point);
}

}  // namespace
}  // namespace drover::search
