// Design spaces and outcomes for the tests of search.
#pragma once

#include <cstdint>
#include <memory>
#include <random>
#include <string>
#include <utility>
#include <vector>

#include "search/method.h"
#include "search/methods.h"
#include "search/space.h"

namespace drover::search::testing {

inline Space make_space(std::vector<Variable> variables, std::vector<double> baseline = {}) {
  absl::StatusOr<Space> space = Space::make(std::move(variables), std::move(baseline));
  return std::move(space).value();
}

inline Variable real(double low, double high) { return {.low = low, .high = high}; }
inline Variable integer(double low, double high) { return {.kind = Kind::kInteger, .low = low, .high = high}; }
inline Variable stepped(double low, double high, double step) {
  return {.kind = Kind::kStepped, .low = low, .high = high, .step = step};
}
inline Variable choice(int choices) { return {.kind = Kind::kChoice, .choices = choices}; }
inline Variable logarithmic(double low, double high) { return {.low = low, .high = high, .scale = Scale::kLog}; }

// A method needs none of its outcomes again.
class NoHistory final : public History {
 public:
  std::int64_t size() const override { return 0; }
  absl::StatusOr<Outcome> outcome(std::int64_t) const override { return absl::NotFoundError("no outcome"); }
};

inline std::unique_ptr<SearchMethod> make(const Space& space, const Settings& settings) {
  auto method = make_method(space, settings);
  return std::move(method).value();
}

inline std::vector<Ask> next(SearchMethod& method, int count) { return method.next(count, NoHistory()); }

inline Outcome evaluated(const Ask& ask, double objective, double violation = 0.0) {
  return {.ask = ask.number, .point = ask.point, .objectives = {objective}, .violation = violation};
}
inline Outcome failed(const Ask& ask, FailureKind kind = FailureKind::kCode) {
  return {.ask = ask.number, .point = ask.point, .verdict = Verdict::kFailed, .failure = kind};
}
inline Outcome withdrawn(const Ask& ask) {
  return {.ask = ask.number, .point = ask.point, .verdict = Verdict::kWithdrawn};
}

// A bowl with its bottom at 0.3 in each coordinate.
inline double bowl(const Point& point) {
  double sum = 0.0;
  for (const double x : point) sum += (x - 0.3) * (x - 0.3);
  return sum;
}

// Small numbers for a test's own decisions: the same on every machine.
class Dice {
 public:
  explicit Dice(std::uint64_t seed) : engine_(seed) {}
  int below(int end) { return static_cast<int>(engine_() % static_cast<std::uint64_t>(end)); }
  double unit() { return static_cast<double>(engine_() >> 11) * 0x1.0p-53; }

 private:
  std::mt19937_64 engine_;
};

}  // namespace drover::search::testing
