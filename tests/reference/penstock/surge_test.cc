#include "penstock/surge.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <numbers>
#include <numeric>

#include "penstock/case.h"

namespace penstock {
namespace {

constexpr int kReaches = 100;
constexpr double kArea = std::numbers::pi / 4 * 0.5 * 0.5;

// The pipe of the Joukowsky row: K 2.2e9, rho 1000, E 2e11, D 0.5, wall 0.01, L 1000, V 2. Level, without friction.
SurgeSetup joukowsky_pipe(double closing_time_s, double reservoir_m = 500) {
  return {.length_m = 1000,
          .diameter_m = 0.5,
          .wave_speed_mps = wave_speed(2.2e9, 1000, 0.5, 0.01, 2e11, 0.3, false),
          .reservoir_m = reservoir_m,
          .elevation_m = std::vector<double>(kReaches + 1, 0.0),
          .flow_m3s = 2 * kArea,
          .closing_time_s = closing_time_s};
}

double highest_at_nozzles(Surge& surge, double until_s) {
  double highest = surge.head_m().back();
  while (surge.time_s() < until_s) {
    surge.step();
    highest = std::max(highest, surge.head_m().back());
  }
  return highest;
}

// Sum over the nodes, the ends counted half.
template <class Term>
double along_the_pipe(const Surge& surge, Term term) {
  const std::size_t last = surge.head_m().size() - 1;
  double sum = (term(std::size_t{0}) + term(last)) / 2;
  for (std::size_t node = 1; node < last; ++node) sum += term(node);
  return sum;
}

// Kinetic and elastic energy of the deviation from the reservoir's level, up to a constant factor.
double energy(const Surge& surge, const SurgeSetup& setup) {
  const double impedance = setup.wave_speed_mps / (kGravity * kArea);
  return along_the_pipe(surge, [&](std::size_t node) {
    const double head = surge.head_m()[node] - setup.reservoir_m;
    const double flow = impedance * surge.flow_m3s()[node];
    return head * head + flow * flow;
  });
}

// Joukowsky's dp = rho a dV with Korteweg's wave speed (Wylie and Streeter, Fluid Transients in Systems); evaluated
// with 25 digits.
TEST(WaveSpeed, IsThatOfTheWorkedCase) {
  EXPECT_NEAR(wave_speed(2.2e9, 1000, 0.5, 0.01, 1e40, 0.3, false), 1483.239697, 5e-7);
  EXPECT_NEAR(wave_speed(2.2e9, 1000, 0.5, 0.01, 2e11, 0.3, false), 1191.366794, 5e-7);
  EXPECT_NEAR(wave_speed(2.2e9, 1000, 0.5, 0.01, 2e11, 0.3, true), 1210.858349, 5e-7);
}

TEST(Surge, OfARapidClosureIsJoukowskys) {
  const SurgeSetup setup = joukowsky_pipe(0.5);
  Surge surge(setup);

  const double rise = highest_at_nozzles(surge, 1.678744119) - 500;

  EXPECT_NEAR(rise, 242.9712072, 5e-7);
  EXPECT_NEAR(1000 * kGravity * rise, 2382733.589, 5e-3);
}

TEST(Surge, OfARapidClosureComesBackAfterTwoLengths) {
  Surge surge(joukowsky_pipe(0.001));

  for (int i = 0; i < 2 * kReaches; ++i) surge.step();
  EXPECT_NEAR(surge.time_s(), 1.678744119, 5e-10);
  EXPECT_NEAR(surge.head_m().back(), 500 + 242.9712072, 1e-6);

  surge.step();
  EXPECT_NEAR(surge.head_m().back(), 500 - 242.9712072, 1e-6);
}

TEST(Surge, OfASlowClosureStaysFarBelowJoukowskys) {
  const double closing_s = 10 * 1.678744119;
  Surge surge(joukowsky_pipe(closing_s));

  const double rise = highest_at_nozzles(surge, 2 * closing_s) - 500;

  // To stop the column in the closing time takes L V/(g T) on average (momentum of a rigid column).
  EXPECT_GT(rise, 1000 * 2 / (kGravity * closing_s));
  EXPECT_LT(rise, 0.3 * 242.9712072);
}

TEST(Surge, StaysInTheSteadyFlowWhileTheNozzlesDoNotMove) {
  SurgeSetup setup = joukowsky_pipe(1e9);
  setup.friction = 0.02;
  setup.loss_intake = 0.5;
  setup.loss_bends = 3;
  Surge surge(setup);
  const std::vector<double> before = surge.head_m();

  for (int i = 0; i < 1000; ++i) surge.step();

  const double loss = (0.02 * 1000 / 0.5 + 0.5 + 3) * 2 * 2 / (2 * kGravity);
  EXPECT_NEAR(surge.net_head_m(), 500 - loss, 1e-8);
  for (std::size_t node = 0; node < before.size(); ++node) EXPECT_NEAR(surge.head_m()[node], before[node], 1e-8);
}

// Of the column's momentum, dQ/dt = g A (head at the intake - head at the nozzles)/L, and of its mass,
// dH/dt = a^2/(g A) (inflow - outflow)/L: in every step.
TEST(Surge, KeepsMomentumAndMassWithoutFriction) {
  const SurgeSetup setup = joukowsky_pipe(3.0);
  Surge surge(setup);
  const double impedance = setup.wave_speed_mps / (kGravity * kArea);
  const auto flow = [&](std::size_t node) { return surge.flow_m3s()[node]; };
  const auto head = [&](std::size_t node) { return surge.head_m()[node]; };

  for (int i = 0; i < 1000; ++i) {
    const double flow_before = along_the_pipe(surge, flow), head_before = along_the_pipe(surge, head);
    const double drive_before = head(0) - head(kReaches), stored_before = flow(0) - flow(kReaches);
    surge.step();
    const double drive = (drive_before + head(0) - head(kReaches)) / 2;
    const double stored = (stored_before + flow(0) - flow(kReaches)) / 2;
    ASSERT_NEAR(along_the_pipe(surge, flow) - flow_before, drive / impedance, 1e-9) << i;
    ASSERT_NEAR(along_the_pipe(surge, head) - head_before, stored * impedance, 1e-7) << i;
  }
}

TEST(Surge, KeepsItsEnergyBetweenAClosedEndAndAReservoir) {
  const SurgeSetup setup = joukowsky_pipe(0.8);
  Surge surge(setup);
  while (surge.time_s() < 0.8) surge.step();
  const double closed = energy(surge, setup);

  for (int i = 0; i < 40 * kReaches; ++i) surge.step();

  EXPECT_GT(closed, 0);
  EXPECT_NEAR(energy(surge, setup), closed, 1e-10 * closed);
}

TEST(Surge, OnlyLosesEnergyToFriction) {
  SurgeSetup setup = joukowsky_pipe(0.8);
  setup.friction = 0.02;
  setup.loss_intake = 0.5;
  Surge surge(setup);
  while (surge.time_s() < 0.8) surge.step();
  const double closed = energy(surge, setup);

  double before = closed;
  for (int i = 0; i < 40 * kReaches; ++i) {
    surge.step();
    ASSERT_LE(energy(surge, setup), before * (1 + 1e-12)) << i;
    before = energy(surge, setup);
  }

  EXPECT_LT(before, 0.9 * closed);
}

// Closed at once under 100 m of head, the returning wave would need 143 m of suction at the nozzles. The column parts
// there instead: between 2L/a and 4L/a it draws back with Q - (Hr - Hv)/B (the characteristic that left the reservoir
// with -Q), and the cavity grows by that.
TEST(Surge, OpensACavityWhereThePressureWouldFallBelowTheVapours) {
  SurgeSetup setup = joukowsky_pipe(0.001, 100);
  std::fill(setup.elevation_m.begin(), setup.elevation_m.end() - 1, -5.0);  // so that only the nozzles' end parts
  setup.vapour_head_m = -10;
  Surge surge(setup);
  const double impedance = setup.wave_speed_mps / (kGravity * kArea);
  const double draws_back = setup.flow_m3s - (100.0 - -10.0) / impedance;

  for (int i = 0; i < 2 * kReaches; ++i) surge.step();
  EXPECT_EQ(surge.cavity_m3().back(), 0);
  for (int i = 0; i < 2 * kReaches; ++i) surge.step();

  EXPECT_NEAR(surge.cavity_m3().back(), 1.678744119 * draws_back, 1e-9);
  EXPECT_NEAR(surge.head_m().back(), -10, 1e-12);
  EXPECT_EQ(std::accumulate(surge.cavity_m3().begin(), surge.cavity_m3().end() - 1, 0.0), 0);
}

TEST(Surge, ClosesItsCavityAgain) {
  SurgeSetup setup = joukowsky_pipe(0.001, 100);
  setup.friction = 0.02;
  Surge surge(setup);
  for (int i = 0; i < 3 * kReaches; ++i) surge.step();
  EXPECT_GT(surge.cavity_m3().back(), 0);

  int steps = 0;
  while (surge.cavity_m3().back() > 0 && steps < 40 * kReaches) {
    surge.step();
    ++steps;
  }

  EXPECT_EQ(surge.cavity_m3().back(), 0);
  EXPECT_GT(surge.head_m().back(), 0);
}

TEST(Surge, OpensNoCavityUnderEnoughHead) {
  Surge surge(joukowsky_pipe(0.001, 300));

  for (int i = 0; i < 20 * kReaches; ++i) {
    surge.step();
    ASSERT_EQ(*std::max_element(surge.cavity_m3().begin(), surge.cavity_m3().end()), 0) << i;
  }
}

TEST(Opening, FallsFromOneToNoneWithoutAJerk) {
  EXPECT_EQ(opening(-1), 1);
  EXPECT_EQ(opening(0), 1);
  EXPECT_EQ(opening(0.5), 0.5);
  EXPECT_EQ(opening(1), 0);
  EXPECT_EQ(opening(7), 0);
  EXPECT_NEAR(1 - opening(1e-4), 0, 4e-8);
  EXPECT_NEAR(opening(1 - 1e-4), 0, 4e-8);
}

}  // namespace
}  // namespace penstock
