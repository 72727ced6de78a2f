#include "penstock/steady.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "penstock/cost.h"
#include "reference/penstock/demo_deck.h"

namespace penstock {
namespace {

// A straight pipe that falls by `drop_m` over its length, without minor losses.
Case plain_pipe(double density, double viscosity, double diameter_m, double length_m, double roughness_m,
                double flow_m3s, double drop_m) {
  Case c = demo_case();
  c.reservoir_m = drop_m + 1;
  c.profile = {{.station_m = 0, .elevation_m = drop_m}, {.station_m = length_m, .elevation_m = 0}};
  c.water_density = density;
  c.water_viscosity = viscosity;
  c.diameter_m = diameter_m;
  c.roughness_mm = roughness_m * 1e3;
  c.loss_intake = c.loss_bends = 0;
  c.river_flow_m3s = flow_m3s;
  return c;
}

// Colebrook (1939), J. Inst. Civil Engineers 11, 133-156: his equation, evaluated with 25 digits. The tolerance is
// half of the table's last digit.
TEST(Colebrook, GivesTheTableOfTheEquation) {
  constexpr double kRoughness[] = {0, 1e-6, 1e-5, 1e-4, 1e-3, 1e-2, 5e-2};
  struct Row {
    double reynolds;
    double friction[7];
    double half_digit;
  };
  constexpr Row kRows[] = {
      {4e3, {0.039907014, 0.039908029, 0.039917167, 0.040008431, 0.040910390, 0.049082269, 0.076986835}, 5e-10},
      {1e4, {0.030882950, 0.030884498, 0.030898423, 0.031037212, 0.032381806, 0.043126585, 0.073801276}, 5e-10},
      {1e5, {0.017989773, 0.017995193, 0.018043803, 0.018513866, 0.022174536, 0.038503544, 0.071780929}, 5e-10},
      {1e6, {0.011645041, 0.011668156, 0.011869545, 0.013441438, 0.019943466, 0.037964742, 0.071573754}, 5e-10},
      {1e7, {0.0081026694, 0.0082131804, 0.0089957117, 0.012166081, 0.019667052, 0.037909826, 0.071552982}, 5e-10},
      {1e8, {0.0059404664, 0.0064325565, 0.0081875591, 0.011999051, 0.019638633, 0.037904323, 0.071550904}, 5e-10},
  };

  for (const Row& row : kRows) {
    for (int i = 0; i < 7; ++i) {
      const double tolerance = row.friction[i] < 0.01 ? row.half_digit / 10 : row.half_digit;
      EXPECT_NEAR(colebrook(row.reynolds, kRoughness[i]), row.friction[i], tolerance * 1.001)
          << "Re " << row.reynolds << ", e/D " << kRoughness[i];
    }
  }
}

TEST(Colebrook, SolvesItsEquationToTheLastBits) {
  for (const double reynolds : {4e3, 2.7e5, 1e8}) {
    for (const double roughness : {0.0, 1e-4, 5e-2}) {
      const double root = std::sqrt(colebrook(reynolds, roughness));

      const double right = -2 * std::log10(roughness / 3.7 + 2.51 / (reynolds * root));

      EXPECT_NEAR(1 / root, right, 1e-13 / root) << reynolds << " " << roughness;
    }
  }
}

// The equation's limit for large Re, [-2 log10(e/D/3.7)]^-2, evaluated with 25 digits.
TEST(Colebrook, GoesToTheFullyRoughLimit) { EXPECT_NEAR(colebrook(1e16, 1e-3), 0.0196354659, 5e-11); }

// White, Fluid Mechanics, example 6.6 (from memory); Re and f evaluated with 25 digits.
TEST(Colebrook, GivesTheAsphaltedCastIronOfTheTextbook) {
  EXPECT_NEAR(colebrook(3.0 / 1.1e-5, 0.0008), 0.0198326701, 5e-11);
}

TEST(FrictionFactor, IsLaminarBelowAndColebrooksAboveAndHasNoJumpBetween) {
  EXPECT_DOUBLE_EQ(friction_factor(1000, 1e-3), 0.064);
  EXPECT_DOUBLE_EQ(friction_factor(1e5, 1e-3), colebrook(1e5, 1e-3));
  EXPECT_NEAR(friction_factor(2300, 1e-3), friction_factor(2300.001, 1e-3), 1e-7);
  EXPECT_NEAR(friction_factor(4000, 1e-3), friction_factor(3999.999, 1e-3), 1e-7);
}

// Darcy and Weisbach's h = f (L/D) V^2/(2g) with Colebrook's f (White, Fluid Mechanics); evaluated with 25 digits.
TEST(Steady, LosesTheHeadOfDarcyAndWeisbach) {
  const Case c = plain_pipe(998.2, 1.002e-3, 0.1, 100, 4.5e-5, 0.02, 50);

  const Steady s = steady_state(c);

  EXPECT_NEAR(s.velocity_mps, 2.54647909, 5e-9);
  EXPECT_NEAR(s.reynolds, 253682.178, 5e-4);
  EXPECT_NEAR(s.friction, 0.01816429225, 5e-12);
  EXPECT_NEAR(s.friction_loss_m, 6.005484329, 5e-10);
  EXPECT_NEAR(s.friction_loss_m * 998.2 * kGravity, 58787.67427, 5e-6);
}

// Hagen and Poiseuille's dp = 128 mu L Q/(pi d^4) (White, Fluid Mechanics); evaluated with 25 digits.
TEST(Steady, LosesTheHeadOfHagenAndPoiseuilleWhenItIsLaminar) {
  const Case c = plain_pipe(900, 0.1, 0.01, 2, 1e-5, 1e-5, 50);

  const Steady s = steady_state(c);

  EXPECT_NEAR(s.reynolds, 11.459, 5e-4);
  EXPECT_NEAR(s.friction_loss_m * 900 * kGravity, 8148.73309, 5e-6);
}

TEST(Steady, AccountsForAllOfTheHeadAndAllOfThePower) {
  const Case c = demo_case();

  const Steady s = steady_state(c);

  EXPECT_NEAR(s.net_head_m + s.friction_loss_m + s.minor_loss_m, 620.0 - 300.0, 1e-10);
  EXPECT_NEAR(s.minor_loss_m, 1.9 * s.velocity_mps * s.velocity_mps / (2 * kGravity), 1e-12);
  EXPECT_NEAR(s.power_kw, 999.7e-3 * kGravity * 0.35 * s.net_head_m * s.efficiency, 1e-9);
  EXPECT_LT(s.efficiency, 0.975 * 0.975 * 0.915 * 0.95);
  EXPECT_GT(s.efficiency, 0.7);
}

TEST(Steady, DoesNotUseMoreThanTheRatedFlow) {
  const Steady flood = steady_state(demo_case({{"river_flow", "3.0"}}));

  EXPECT_EQ(flood.flow_m3s, 0.40);
  EXPECT_EQ(flood.jets_open, 2);
  EXPECT_EQ(flood.jet_load, 1);
}

TEST(Steady, ShutsJetsWhenTheRiverIsLow) {
  const Steady low = steady_state(demo_case({{"jets", "4"}, {"river_flow", "0.06"}}));
  const Steady high = steady_state(demo_case({{"jets", "4"}, {"river_flow", "0.40"}}));
  const Steady one_jet = steady_state(demo_case({{"jets", "1"}, {"river_flow", "0.06"}}));

  EXPECT_EQ(low.jets_open, 1);
  EXPECT_EQ(high.jets_open, 4);
  EXPECT_GT(low.efficiency, one_jet.efficiency * 1.1);
}

TEST(Runner, IsBestNearThreeQuartersOfTheLoadAndFallsOffSmoothly) {
  EXPECT_GT(runner_share(0.75, 1), runner_share(1.0, 1));
  EXPECT_GT(runner_share(0.75, 1), runner_share(0.25, 1) * 1.05);
  EXPECT_GT(runner_share(0.75, 1), runner_share(0.75, 6));
  double before = runner_share(0.001, 1);
  for (double load = 0.002; load < 1; load += 0.001) {
    EXPECT_LT(std::abs(runner_share(load, 1) - before), 0.006) << load;
    before = runner_share(load, 1);
  }
}

// Capital recovery factor for 5 % and 40 years: 0.0583 in the tables of engineering economics (common practice, no
// source); the further digits are evaluated.
TEST(Cost, PaysBackALoanOverItsLife) {
  EXPECT_NEAR(annuity(0.05, 40), 0.05827816117, 5e-12);
  EXPECT_DOUBLE_EQ(annuity(0, 40), 1.0 / 40);
}

TEST(Cost, AddsUpWhatTheDesignNeeds) {
  const Case c = demo_case();

  const Cost cost = cost_of(c);

  const double outside = std::numbers::pi / 4 * 0.518 * 0.518, inside = std::numbers::pi / 4 * 0.5 * 0.5;
  EXPECT_NEAR(cost.steel_mass_t, 7.850 * (outside - inside) * 1200, 1e-9);
  EXPECT_NEAR(cost.steel, cost.steel_mass_t * 1e3 * 3.10, 1e-6);
  EXPECT_NEAR(cost.trench, 1200 * (140 + 420 * 0.5), 1e-6);
  EXPECT_NEAR(cost.jets, 2 * 32000, 1e-9);
  EXPECT_NEAR(cost.capital, cost.steel + cost.coating + cost.trench + cost.jets + 450000, 1e-6);
  EXPECT_NEAR(cost.annual, cost.capital * (0.05827816117 + 0.012), 1e-4);
}

}  // namespace
}  // namespace penstock
