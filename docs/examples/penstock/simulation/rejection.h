// Load rejection: the grid is lost at time 0, nothing brakes the rotor any more, and the needles close.
#pragma once

#include <functional>
#include <optional>
#include <string>
#include <vector>

#include "case.h"
#include "steady.h"
#include "surge.h"

namespace penstock {

struct Rejection {
  // What ended the plant before the simulation's end, in capitals and without a number of the results; empty: nothing.
  // The results below then cover the time until it happened.
  std::string fatal;
  double wave_speed_mps = 0;
  double step_s = 0;
  double duration_s = 0;
  // One a node. Heads are piezometric.
  std::vector<double> station_m, elevation_m, highest_head_m, lowest_head_m;
  double peak_pressure_mpa = 0;  // gauge, anywhere in the pipe
  double peak_station_m = 0;
  double peak_time_s = 0;
  double lowest_pressure_kpa = 0;  // gauge
  double lowest_station_m = 0;
  double hoop_stress_mpa = 0;    // largest, in the wall that corrosion leaves
  double hoop_limit_mpa = 0;     // yield strength times joint factor
  double largest_cavity_m3 = 0;  // of one node
  double overspeed_percent = 0;
};

// Called now and then with the time simulated, the time to simulate, and the peak pressure so far in MPa.
using Progress = std::function<void(double time_s, double duration_s, double peak_mpa)>;

// The grid of a case: its nodes' elevations, its friction and its steady flow.
SurgeSetup surge_setup(const Case& c, const Steady& steady);

// The closing and three pipe periods (4 L/a) after it. Ends early, with `fatal` set, where
// - the pipe cannot carry the flow (no net head),
// - the hoop stress p D/(2 t) passes the yield strength times the joint factor: the pipe bursts, or
// - a vapour cavity grows beyond the case's limit: the column has separated, and what its halves do when they meet
//   again is beyond this model.
//
// The rotor runs up against nothing but its inertia. Its torque falls in a straight line to none at 1.8 times the rated
// speed, where the buckets run with the jet (usual for impulse turbines; common practice, no source).
Rejection reject_load(const Case& c, const Steady& steady, const Progress& progress);

}  // namespace penstock
