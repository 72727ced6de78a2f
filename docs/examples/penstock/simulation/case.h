// One case: everything a deck says, in the units that its cards are written in.
#pragma once

#include <string>
#include <vector>

namespace penstock {

inline constexpr double kGravity = 9.80665;  // m/s2

struct ProfilePoint {
  double station_m = 0;    // along the pipe, from the intake
  double elevation_m = 0;  // of the pipe's axis
};

struct SteelGrade {
  std::string name;
  double yield_mpa = 0;
  double price_per_kg = 0;  // made, delivered and welded
};

// Valid once read_deck has made it: all numbers finite and inside the ranges of their cards, stations rising from 0,
// `steel` one of `grades`.
struct Case {
  std::string title;
  std::string report_file;  // empty: beside the deck

  double reservoir_m = 0;             // water level at the intake
  std::vector<ProfilePoint> profile;  // at least 2; the last one is the nozzles

  double water_density = 0;        // kg/m3
  double water_viscosity = 0;      // Pa s
  double water_bulk_modulus = 0;   // Pa
  double atmosphere_kpa = 0;       // absolute
  double vapour_pressure_kpa = 0;  // absolute

  double diameter_m = 0;    // inside
  double wall_mm = 0;       // as built
  double corrosion_mm = 0;  // of the wall, not counted on for strength
  double roughness_mm = 0;
  double pipe_modulus = 0;  // Pa
  double poisson = 0;
  bool anchored = false;    // against moving lengthwise, all along
  double joint_factor = 0;  // strength of the welds as a share of the plate's
  std::string steel;
  std::vector<SteelGrade> grades;
  double loss_intake = 0;  // minor losses, in velocity heads
  double loss_bends = 0;

  double river_flow_m3s = 0;
  double rated_flow_m3s = 0;  // of all jets together
  int jets = 0;
  double nozzle_coefficient = 0;  // of the jet's velocity
  double runner_efficiency = 0;   // at its best
  double generator_efficiency = 0;
  double rotor_inertia = 0;  // kg m2
  double rotor_rpm = 0;
  double closing_time_s = 0;

  int reaches = 0;             // of the grid
  double cavity_limit_m3 = 0;  // the largest vapour cavity that is not taken for a separated column

  // Money is in one unit throughout (the demo: euros).
  double cost_coating_per_m2 = 0;
  double cost_trench_per_m = 0;
  double cost_trench_per_m2 = 0;  // for each metre of length and metre of diameter
  double cost_jet = 0;
  double cost_fixed = 0;
  double interest_rate = 0;  // a year
  double life_years = 0;
  double upkeep_rate = 0;  // a year, share of the capital

  double length_m() const { return profile.back().station_m; }
  const SteelGrade& grade() const;             // the one that `steel` names
  double elevation_m(double station_m) const;  // linear between the profile's points
};

}  // namespace penstock
