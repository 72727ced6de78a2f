#include "rejection.h"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <numbers>

namespace penstock {
namespace {

constexpr double kRunawayRatio = 1.8;
constexpr double kPeriodsAfterwards = 3;
constexpr double kMegapascal = 1e6;

// Speed of the rotor as a ratio to its rated speed.
class Rotor {
 public:
  explicit Rotor(const Case& c) {
    const double speed = c.rotor_rpm * std::numbers::pi / 30;
    energy_j_ = c.rotor_inertia * speed * speed;
  }
  double ratio() const { return ratio_; }
  // Under the shaft power the water would give at the rated speed. Exact for a power that does not change.
  void run(double power_w, double step_s) {
    const double rate = power_w / (energy_j_ * (kRunawayRatio - 1));
    ratio_ = kRunawayRatio - (kRunawayRatio - ratio_) * std::exp(-rate * step_s);
  }

 private:
  double energy_j_ = 0;
  double ratio_ = 1;
};

// Follows the pipe through the time: envelope, extremes and what breaks.
class Watch {
 public:
  Watch(const Case& c, const Surge& surge, Rejection& result) : c_(c), surge_(surge), result_(result) {
    result_.highest_head_m = result_.lowest_head_m = surge.head_m();
    result_.lowest_pressure_kpa = pressure_pa(0) * 1e-3;
  }

  void look() {
    for (std::size_t node = 0; node < surge_.head_m().size() && result_.fatal.empty(); ++node) look_at(node);
  }

 private:
  double pressure_pa(std::size_t node) const {
    return c_.water_density * kGravity * (surge_.head_m()[node] - result_.elevation_m[node]);
  }

  void look_at(std::size_t node) {
    const double head = surge_.head_m()[node];
    const double mpa = pressure_pa(node) / kMegapascal;
    result_.highest_head_m[node] = std::max(result_.highest_head_m[node], head);
    result_.lowest_head_m[node] = std::min(result_.lowest_head_m[node], head);
    if (mpa > result_.peak_pressure_mpa) {
      result_.peak_pressure_mpa = mpa;
      result_.peak_station_m = result_.station_m[node];
      result_.peak_time_s = surge_.time_s();
    }
    if (mpa * 1e3 < result_.lowest_pressure_kpa) {
      result_.lowest_pressure_kpa = mpa * 1e3;
      result_.lowest_station_m = result_.station_m[node];
    }
    const double stress = mpa * c_.diameter_m / (2e-3 * (c_.wall_mm - c_.corrosion_mm));
    result_.hoop_stress_mpa = std::max(result_.hoop_stress_mpa, stress);
    result_.largest_cavity_m3 = std::max(result_.largest_cavity_m3, surge_.cavity_m3()[node]);
    if (stress > result_.hoop_limit_mpa) die("PIPE BURSTS", node);
    if (surge_.cavity_m3()[node] > c_.cavity_limit_m3) die("COLUMN SEPARATES", node);
    const double vapour_pa = (c_.vapour_pressure_kpa - c_.atmosphere_kpa) * 1e3;
    if (surge_.time_s() == 0 && pressure_pa(node) < vapour_pa) die("WATER BOILS IN STEADY FLOW", node);
  }

  void die(const char* what, std::size_t node) {
    char text[128];
    std::snprintf(text, sizeof text, "%s AT STATION %.1f M, TIME %.3f S", what, result_.station_m[node],
                  surge_.time_s());
    result_.fatal = text;
  }

  const Case& c_;
  const Surge& surge_;
  Rejection& result_;
};

Rejection nothing_yet(const Case& c) {
  Rejection result;
  for (int node = 0; node <= c.reaches; ++node) {
    result.station_m.push_back(c.length_m() * node / c.reaches);
    result.elevation_m.push_back(c.elevation_m(result.station_m.back()));
  }
  result.wave_speed_mps = wave_speed(c.water_bulk_modulus, c.water_density, c.diameter_m, c.wall_mm * 1e-3,
                                     c.pipe_modulus, c.poisson, c.anchored);
  result.duration_s = c.closing_time_s + kPeriodsAfterwards * 4 * c.length_m() / result.wave_speed_mps;
  result.hoop_limit_mpa = c.grade().yield_mpa * c.joint_factor;
  return result;
}

SurgeSetup setup_of(const Case& c, const Steady& steady, const Rejection& grid) {
  return {.length_m = c.length_m(),
          .diameter_m = c.diameter_m,
          .wave_speed_mps = grid.wave_speed_mps,
          .friction = steady.friction,
          .loss_intake = c.loss_intake,
          .loss_bends = c.loss_bends,
          .reservoir_m = c.reservoir_m,
          .elevation_m = grid.elevation_m,
          .vapour_head_m = (c.vapour_pressure_kpa - c.atmosphere_kpa) * 1e3 / (c.water_density * kGravity),
          .flow_m3s = steady.flow_m3s,
          .closing_time_s = c.closing_time_s};
}

}  // namespace

SurgeSetup surge_setup(const Case& c, const Steady& steady) { return setup_of(c, steady, nothing_yet(c)); }

Rejection reject_load(const Case& c, const Steady& steady, const Progress& progress) {
  Rejection result = nothing_yet(c);
  if (steady.net_head_m <= 0) {
    result.fatal = "NO NET HEAD IS LEFT AT THIS FLOW";
    return result;
  }
  Surge surge(setup_of(c, steady, result));
  result.step_s = surge.step_s();
  Watch watch(c, surge, result);
  watch.look();
  Rotor rotor(c);
  // The generator's efficiency has no part in what drives the rotor.
  const double shaft_efficiency = steady.efficiency / c.generator_efficiency;
  const auto shaft_power_w = [&] {
    return c.water_density * kGravity * surge.nozzle_flow_m3s() * std::max(surge.net_head_m(), 0.0) * shaft_efficiency;
  };
  const double progress_every_s = result.duration_s / 20;
  double next_progress_s = progress_every_s;
  while (result.fatal.empty() && surge.time_s() < result.duration_s) {
    const double power_before = shaft_power_w();
    surge.step();
    rotor.run((power_before + shaft_power_w()) / 2, surge.step_s());
    watch.look();
    if (surge.time_s() < next_progress_s) continue;
    next_progress_s += progress_every_s;
    progress(surge.time_s(), result.duration_s, result.peak_pressure_mpa);
  }
  result.overspeed_percent = 100 * (rotor.ratio() - 1);
  return result;
}

}  // namespace penstock
