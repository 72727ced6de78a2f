#include "steady.h"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace penstock {

double colebrook(double reynolds, double roughness) {
  // With x = 1/sqrt f the equation is x + 2 log10(r + s x) = 0: rising and concave, so that Newton's method settles
  // from any start that keeps the logarithm's argument positive; 7 (f = 0.02) is near every practical case.
  const double r = roughness / 3.7;
  const double s = 2.51 / reynolds;
  double x = 7;
  for (int turn = 0; turn < 50; ++turn) {
    const double step = (x + 2 * std::log10(r + s * x)) / (1 + 2 / std::numbers::ln10 * s / (r + s * x));
    x = std::max(x - step, 0.1);
    if (std::abs(step) < 1e-14 * x) break;
  }
  return 1 / (x * x);
}

double friction_factor(double reynolds, double roughness) {
  constexpr double kLaminar = 2300, kTurbulent = 4000;
  if (reynolds <= kLaminar) return 64 / reynolds;
  if (reynolds >= kTurbulent) return colebrook(reynolds, roughness);
  const double share = (reynolds - kLaminar) / (kTurbulent - kLaminar);
  return std::lerp(64 / kLaminar, colebrook(kTurbulent, roughness), share);
}

double runner_share(double load, int open) {
  const double part_load = 1 - 0.55 * std::exp(-9 * load);
  const double off_best = 1 - 0.10 * (load - 0.75) * (load - 0.75);
  const double crowding = 1 - 0.006 * (open - 1);
  return std::max(part_load * off_best * crowding, 0.0);
}

Steady steady_state(const Case& c) {
  Steady s;
  const double area = std::numbers::pi / 4 * c.diameter_m * c.diameter_m;
  s.flow_m3s = std::min(c.river_flow_m3s, c.rated_flow_m3s);
  s.velocity_mps = s.flow_m3s / area;
  s.reynolds = c.water_density * s.velocity_mps * c.diameter_m / c.water_viscosity;
  s.friction = friction_factor(s.reynolds, c.roughness_mm * 1e-3 / c.diameter_m);
  const double velocity_head = s.velocity_mps * s.velocity_mps / (2 * kGravity);
  s.friction_loss_m = s.friction * c.length_m() / c.diameter_m * velocity_head;
  s.minor_loss_m = (c.loss_intake + c.loss_bends) * velocity_head;
  s.net_head_m = c.reservoir_m - c.profile.back().elevation_m - s.friction_loss_m - s.minor_loss_m;

  double best = -1;
  for (int open = 1; open <= c.jets; ++open) {
    const double load = s.flow_m3s * c.jets / (c.rated_flow_m3s * open);
    const double share = runner_share(load, open);
    const bool overloaded = load > 1 + 1e-12;  // a needle cannot open further; all jets together always suffice
    if (overloaded || share <= best) continue;
    best = share;
    s.jets_open = open;
    s.jet_load = load;
  }
  s.efficiency = c.nozzle_coefficient * c.nozzle_coefficient * c.runner_efficiency * best * c.generator_efficiency;
  s.power_kw = 1e-3 * c.water_density * kGravity * s.flow_m3s * std::max(s.net_head_m, 0.0) * s.efficiency;
  return s;
}

}  // namespace penstock
