#include "penstock/rejection.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "penstock/cost.h"
#include "penstock/report.h"
#include "reference/penstock/demo_deck.h"

namespace penstock {
namespace {

using testing::HasSubstr;
using testing::Not;
using testing::StartsWith;

Rejection reject(const Case& c) {
  return reject_load(c, steady_state(c), [](double, double, double) {});
}

std::string report_of(const Case& c) { return report(c, steady_state(c), reject(c), cost_of(c)); }

TEST(Rejection, MovesItsPeakByLessThanAHundredthWhenTheGridIsHalved) {
  for (const Marks& design : {todays_design(), best_design()}) {
    for (const char* flow : {"0.10", "0.20", "0.35"}) {
      Case coarse = demo_case(design);
      coarse.river_flow_m3s = std::strtod(flow, nullptr);
      Case fine = coarse;
      fine.reaches = 2 * coarse.reaches;

      const double on_coarse = reject(coarse).peak_pressure_mpa, on_fine = reject(fine).peak_pressure_mpa;

      EXPECT_GT(on_coarse, 3.1) << flow;
      EXPECT_NEAR(on_coarse, on_fine, 0.01 * on_fine) << flow;
    }
  }
}

TEST(Rejection, EndsWithTheGatesShutAndTheHeadOfTheReservoirInside) {
  const Rejection r = reject(demo_case());

  EXPECT_EQ(r.fatal, "");
  EXPECT_EQ(r.station_m.size(), 121u);
  EXPECT_EQ(r.station_m.back(), 1200);
  EXPECT_EQ(r.elevation_m[45], 600);  // the shoulder at station 450
  for (std::size_t node = 0; node < r.station_m.size(); ++node) {
    EXPECT_LE(r.lowest_head_m[node], r.highest_head_m[node]) << node;
    EXPECT_GT(r.lowest_head_m[node], r.elevation_m[node]) << node;
  }
  EXPECT_EQ(r.peak_station_m, 1200);
  EXPECT_NEAR(r.peak_pressure_mpa, 999.7 * kGravity * (r.highest_head_m.back() - 300) * 1e-6, 1e-12);
  EXPECT_NEAR(r.hoop_stress_mpa, r.peak_pressure_mpa * 500 / (2 * 7.0), 1e-9);
}

TEST(Rejection, SurgesMoreTheFasterItCloses) {
  const double fast = reject(demo_case({{"closing_time", "6.0"}})).peak_pressure_mpa;
  const double slow = reject(demo_case({{"closing_time", "12.0"}})).peak_pressure_mpa;
  const double very_slow = reject(demo_case({{"closing_time", "600.0"}})).peak_pressure_mpa;

  EXPECT_GT(fast, slow * 1.03);
  EXPECT_NEAR(very_slow, 999.7 * kGravity * 320 * 1e-6, 0.01);  // nearly the standing water's
}

TEST(Rejection, LetsTheRotorRunFasterTheSlowerItCloses) {
  const double fast = reject(demo_case({{"closing_time", "6.0"}})).overspeed_percent;
  const double slow = reject(demo_case({{"closing_time", "12.0"}})).overspeed_percent;
  const double never = reject(demo_case({{"closing_time", "3000.0"}})).overspeed_percent;

  EXPECT_LT(fast, slow);
  EXPECT_LT(slow, never);
  EXPECT_NEAR(never, 80, 0.01);  // runaway: 1.8 times the rated speed
}

// While the speed hardly changes, the energy J w^2 takes up the power of half the closing time, and a little more for
// the head that rises meanwhile.
TEST(Rejection, GivesAHeavyRotorTheEnergyOfTheJets) {
  Case c = demo_case({{"closing_time", "60.0"}});
  c.rotor_inertia = 1e7;
  const double speed = 750 * 3.14159265358979 / 30;
  const Steady s = steady_state(c);

  const double overspeed = reject(c).overspeed_percent / 100;

  const double expected = s.power_kw * 1e3 / 0.95 * 30.0 / (1e7 * speed * speed);
  EXPECT_GT(overspeed, expected);
  EXPECT_LT(overspeed, 1.05 * expected);
}

TEST(Rejection, BurstsThePipeWhereTheHoopStressPassesTheYieldStrength) {
  const Case c = demo_case({{"wall", "6.0"}});

  const Rejection r = reject(c);

  EXPECT_THAT(r.fatal, StartsWith("PIPE BURSTS AT STATION 1200.0 M, TIME "));
  EXPECT_EQ(r.hoop_limit_mpa, 235 * 0.85);
  EXPECT_GT(r.hoop_stress_mpa, r.hoop_limit_mpa);
  EXPECT_EQ(reject(demo_case({{"wall", "6.0"}, {"steel", "S355"}})).fatal, "");
}

TEST(Rejection, StandsOnTheEdgeOfTheBurstWithTheBestDesign) {
  Marks thinner = best_design();
  thinner["wall"] = "4.0";
  Marks wider = best_design();
  wider["diameter"] = "0.44";

  const Rejection r = reject(demo_case(best_design()));

  EXPECT_EQ(r.fatal, "");
  EXPECT_GT(r.hoop_stress_mpa, 0.98 * r.hoop_limit_mpa);
  EXPECT_THAT(reject(demo_case(thinner)).fatal, StartsWith("PIPE BURSTS"));
  EXPECT_THAT(reject(demo_case(wider)).fatal, StartsWith("PIPE BURSTS"));
}

TEST(Rejection, PartsTheColumnAtTheShoulderWhenItClosesTooFast) {
  const Rejection r = reject(demo_case({{"closing_time", "3.0"}, {"wall", "14.0"}, {"steel", "S460"}}));

  EXPECT_THAT(r.fatal, StartsWith("COLUMN SEPARATES AT STATION 450.0 M"));
  EXPECT_GT(r.largest_cavity_m3, 1e-3);
}

TEST(Rejection, GoesOnWithACavityBelowTheLimit) {
  Case c = demo_case({{"closing_time", "3.0"}, {"wall", "14.0"}, {"steel", "S460"}});
  c.cavity_limit_m3 = 10;

  const Rejection r = reject(c);

  EXPECT_EQ(r.fatal, "");
  EXPECT_GT(r.largest_cavity_m3, 1e-3);
  EXPECT_NEAR(r.lowest_pressure_kpa, 1.23 - 95.0, 1e-6);
  EXPECT_THAT(report_of(c), HasSubstr("WARNING: A VAPOUR CAVITY"));
}

TEST(Rejection, RefusesASteadyFlowThatBoilsOrDoesNotArrive) {
  Case boils = demo_case();
  boils.profile[2].elevation_m = 619.9;  // 2 m of head are lost up to there, and this thin air carries 0.4 m
  boils.atmosphere_kpa = 5;
  Case dry = demo_case();
  dry.diameter_m = 0.15;

  EXPECT_THAT(reject(boils).fatal, StartsWith("WATER BOILS IN STEADY FLOW AT STATION 440.0 M, TIME 0.000"));
  EXPECT_THAT(reject(dry).fatal, StartsWith("NO NET HEAD"));
}

TEST(Report, HasOneNumberALineInTheResults) {
  const Case c = demo_case();

  const std::string text = report_of(c);

  EXPECT_THAT(text, HasSubstr("\n POWER                    "));
  EXPECT_THAT(text, HasSubstr("\n PEAK PRESSURE            3.59845E+00 MPA\n"));
  EXPECT_NEAR(number_after(text, "ANNUAL COST"), cost_of(c).annual * 1e-3, 1e-3);
  EXPECT_THAT(text, Not(HasSubstr("FATAL")));
  EXPECT_THAT(text, Not(HasSubstr("WARNING")));
}

TEST(Report, HasNoResultsOfAPlantThatBroke) {
  const std::string text = report_of(demo_case({{"wall", "5.0"}}));

  EXPECT_THAT(text, HasSubstr("\n *** FATAL: PIPE BURSTS AT STATION 990.0 M, TIME 0.000 S\n"));
  EXPECT_THAT(text, Not(HasSubstr("PEAK PRESSURE")));
  EXPECT_THAT(text, Not(HasSubstr(" POWER ")));
}

}  // namespace
}  // namespace penstock
