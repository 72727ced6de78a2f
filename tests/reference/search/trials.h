// Many starts of a leapfrogging search on a function with a known answer, and how they went.
#pragma once

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <functional>
#include <iostream>
#include <limits>
#include <string>
#include <vector>

#include "search/method.h"
#include "search/methods.h"
#include "search/space.h"

namespace drover::search {

struct Problem {
  std::string name;
  std::vector<Variable> box;
  double least = 0.0;
  std::function<double(const std::vector<double>&)> value;
  std::function<double(const std::vector<double>&)> violation = {};  // none: every point is feasible
};

struct Trials {
  double success = 0.0;  // share of the starts that end within 1e-3 max(1, |least|) of the least value
  double evaluations = 0.0, deviation = 0.0;  // a start: mean and standard deviation
  double probable = 0.0;                      // evaluations until the global optimum is found with 99 %
  int above = 0;                              // starts that ended elsewhere
};

class NoHistory final : public History {
 public:
  std::int64_t size() const override { return 0; }
  absl::StatusOr<Outcome> outcome(std::int64_t) const override { return absl::NotFoundError("no outcome"); }
};

// One start until it has converged.
inline Progress search_once(const Problem& problem, const Settings& settings) {
  const Space space = Space::make(problem.box).value();
  const auto method = make_method(space, settings).value();
  std::vector<Ask> out;
  while (!method->progress().converged && method->progress().asked < 100'000) {
    for (Ask& ask : method->next(settings.parallel - static_cast<int>(out.size()), NoHistory())) {
      out.push_back(std::move(ask));
    }
    if (out.empty()) break;
    const std::vector<double> at = space.to_user(out.front().point);
    const Outcome outcome{.ask = out.front().number,
                          .point = out.front().point,
                          .objectives = {problem.value(at)},
                          .violation = problem.violation ? problem.violation(at) : 0.0};
    EXPECT_TRUE(method->learn(outcome).ok());
    out.erase(out.begin());
  }
  EXPECT_TRUE(method->progress().converged) << problem.name;
  return method->progress();
}

inline Trials try_out(const Problem& problem, int players, int starts, int parallel = 1) {
  Trials trials;
  double sum = 0.0, squares = 0.0;
  for (int seed = 1; seed <= starts; ++seed) {
    const Progress end = search_once(problem, {.method = "leapfrogging",
                                               .seed = static_cast<std::uint64_t>(seed),
                                               .parallel = parallel,
                                               .population = players,
                                               .tolerance = 1e-3});
    const double margin = 1e-3 * std::max(1.0, std::abs(problem.least));
    const double best = end.best.value_or(std::numeric_limits<double>::infinity());  // nothing feasible: no success
    EXPECT_GE(best, problem.least - 1e-6 * std::max(1.0, std::abs(problem.least))) << "below the least value";
    if (best > problem.least + margin) ++trials.above;
    const auto asked = static_cast<double>(end.asked);
    sum += asked;
    squares += asked * asked;
  }
  trials.success = 1.0 - static_cast<double>(trials.above) / starts;
  trials.evaluations = sum / starts;
  trials.deviation = std::sqrt(std::max(0.0, squares / starts - trials.evaluations * trials.evaluations));
  const double needed = trials.above == 0 ? 1.0 : std::log(0.01) / std::log(1.0 - trials.success);
  trials.probable = std::max(1.0, needed) * trials.evaluations;
  std::cout << problem.name << ", " << players << " players, " << parallel << " out, " << starts << " starts: success "
            << trials.success << ", evaluations " << trials.evaluations << " (" << trials.deviation
            << "), for 99 %: " << trials.probable << '\n';
  return trials;
}

inline Variable from_to(double low, double high) { return {.low = low, .high = high}; }

// The peaks function, least -6.551133332836 at (0.228278920556, -1.625534957500).
inline double peaks(const std::vector<double>& at) {
  const double x = at[0], y = at[1];
  return 3.0 * (1 - x) * (1 - x) * std::exp(-x * x - (y + 1) * (y + 1)) -
         10.0 * (x / 5 - x * x * x - std::pow(y, 5)) * std::exp(-x * x - y * y) -
         std::exp(-(x + 1) * (x + 1) - y * y) / 3.0;
}
inline Problem peaks_problem() { return {"peaks", {from_to(-3, 3), from_to(-3, 3)}, -6.551133332836, peaks}; }

}  // namespace drover::search
