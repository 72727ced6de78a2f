// Leapfrogging on test functions with known optima.
//
// Published tables of evaluation counts and success rates for the method were not found. The reference is an
// independent program of the method as published (uniform random start; a leap out of the box leaps again from there,
// at no cost), stopped at a cluster range of 1e-3 of the box in every variable, 1000 starts each.
//
// Ours starts evenly spread, which helps, and clips the mirrored box before the draw, which costs: beside a bound the
// leaps get short before the swarm knows where to go. Measured over 1000 starts, success is at most 0.075 below the
// reference (camel, 10 players: 0.869 for 0.943) and up to 0.08 above it (peaks, 20 players: 0.847 for 0.766).
#include <gtest/gtest.h>

#include <numbers>

#include "reference/search/trials.h"

namespace drover::search {
namespace {

using Values = std::vector<double>;

double branin(const Values& at) {
  const double pi = std::numbers::pi, x = at[0];
  const double arch = at[1] - 5.1 * x * x / (4 * pi * pi) + 5 * x / pi - 6;
  return arch * arch + 10 * (1 - 1 / (8 * pi)) * std::cos(x) + 10;
}

double goldstein_price(const Values& at) {
  const double a = at[0], b = at[1];
  const double one = 19 - 14 * a + 3 * a * a - 14 * b + 6 * a * b + 3 * b * b;
  const double two = 18 - 32 * a + 12 * a * a + 48 * b - 36 * a * b + 27 * b * b;
  return (1 + (a + b + 1) * (a + b + 1) * one) * (30 + (2 * a - 3 * b) * (2 * a - 3 * b) * two);
}

double rosenbrock(const Values& at) {
  const double up = at[1] - at[0] * at[0], along = 1 - at[0];
  return 100 * up * up + along * along;
}

double camel(const Values& at) {
  const double x = at[0], y = at[1];
  return (4 - 2.1 * x * x + x * x * x * x / 3) * x * x + x * y + (-4 + 4 * y * y) * y * y;
}

double rastrigin(const Values& at) {
  double sum = 20.0;
  for (const double x : at) sum += x * x - 10 * std::cos(2 * std::numbers::pi * x);
  return sum;
}

struct Row {
  Problem problem;
  int players;
  double success, evaluations;  // of the reference
};

std::vector<Row> table() {
  const Problem branin_problem{"Branin", {from_to(-5, 10), from_to(0, 15)}, 5 / (4 * std::numbers::pi), branin};
  const Problem goldstein{"Goldstein-Price", {from_to(-2, 2), from_to(-2, 2)}, 3.0, goldstein_price};
  const Problem rosenbrock2{"Rosenbrock", {from_to(-2, 2), from_to(-2, 2)}, 0.0, rosenbrock};
  const Problem camel_problem{"camel", {from_to(-3, 3), from_to(-2, 2)}, -1.031628453490, camel};
  const Problem rastrigin2{"Rastrigin", {from_to(-5.12, 5.12), from_to(-5.12, 5.12)}, 0.0, rastrigin};
  return {
      {peaks_problem(), 10, 0.706, 96}, {peaks_problem(), 20, 0.766, 190}, {peaks_problem(), 40, 0.916, 381},
      {branin_problem, 10, 1.000, 100}, {branin_problem, 20, 1.000, 196},  {branin_problem, 40, 1.000, 393},
      {goldstein, 10, 0.685, 113},      {goldstein, 20, 0.805, 208},       {goldstein, 40, 0.915, 395},
      {rosenbrock2, 10, 0.398, 281},    {rosenbrock2, 20, 0.953, 500},     {rosenbrock2, 40, 0.999, 847},
      {camel_problem, 10, 0.943, 96},   {camel_problem, 20, 0.977, 191},   {camel_problem, 40, 0.997, 381},
      {rastrigin2, 10, 0.094, 96},      {rastrigin2, 20, 0.214, 198},      {rastrigin2, 40, 0.376, 407},
  };
}

constexpr int kStarts = 300;
constexpr double kCostOfClipping = 0.08;

TEST(Leapfrogging, DoesAsWellAsTheReferenceOnSixFunctions) {
  for (const Row& row : table()) {
    const Trials trials = try_out(row.problem, row.players, kStarts);
    std::cout << "    reference: success " << row.success << ", evaluations " << row.evaluations << '\n';
    // Three standard deviations of the difference between our share of 300 starts and the reference's of 1000.
    const double chance = 3.0 * std::sqrt(row.success * (1.0 - row.success) * (1.0 / kStarts + 1.0 / 1000.0));
    EXPECT_GE(trials.success, row.success - kCostOfClipping - chance) << row.problem.name << ", " << row.players;
    // Mostly within 3 %; along Rosenbrock's valley the two differ by 10 %, and 300 starts by 2 % more.
    EXPECT_NEAR(trials.evaluations / row.evaluations, 1.0, 0.15) << row.problem.name << ", " << row.players;
  }
}

// CEC 2006 (Liang et al., technical report), g08: two smooth constraints, 0.9 % of the box is feasible.
TEST(Leapfrogging, FindsTheFeasibleOptimumOfG08) {
  const double pi = std::numbers::pi;
  // At 0 the published formula has no value; the box starts beside it.
  const Problem g08{"g08",
                    {from_to(1e-3, 10), from_to(1e-3, 10)},
                    -0.0958250414180359,
                    [pi](const Values& x) {
                      return -std::pow(std::sin(2 * pi * x[0]), 3) * std::sin(2 * pi * x[1]) /
                             (std::pow(x[0], 3) * (x[0] + x[1]));
                    },
                    [](const Values& x) {
                      return std::max(0.0, x[0] * x[0] - x[1] + 1) + std::max(0.0, 1 - x[0] + (x[1] - 4) * (x[1] - 4));
                    }};
  EXPECT_NEAR(g08.value({1.22797135260752599, 4.24537336612274885}), g08.least, 1e-12);
  EXPECT_EQ(g08.violation({1.22797135260752599, 4.24537336612274885}), 0.0);
  // Measured 0.67 of 100 starts (most others end on another wave of the sines); three and a half standard deviations
  // less.
  EXPECT_GE(try_out(g08, 20, 100).success, 0.5);
}

// The same report, g24: the feasible set is two separate pieces and the optimum is in a corner of two constraints.
TEST(Leapfrogging, FindsTheFeasibleOptimumOfG24) {
  const Problem g24{"g24",
                    {from_to(0, 3), from_to(0, 4)},
                    -5.50801327159536,
                    [](const Values& x) { return -x[0] - x[1]; },
                    [](const Values& at) {
                      const double x = at[0], y = at[1], x2 = x * x, x3 = x2 * x, x4 = x3 * x;
                      return std::max(0.0, -2 * x4 + 8 * x3 - 8 * x2 + y - 2) +
                             std::max(0.0, -4 * x4 + 32 * x3 - 88 * x2 + 96 * x + y - 36);
                    }};
  EXPECT_NEAR(g24.value({2.32952019747762, 3.17849307411774}), g24.least, 1e-12);
  EXPECT_NEAR(g24.violation({2.32952019747762, 3.17849307411774}), 0.0, 1e-12);
  // Measured 0.49 of 100 starts (the others end on the smaller piece or short of the corner); three less.
  EXPECT_GE(try_out(g24, 20, 100).success, 0.34);
}

}  // namespace
}  // namespace drover::search
