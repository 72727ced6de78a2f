#include "cost.h"

#include <cmath>
#include <numbers>

namespace penstock {

double annuity(double rate, double years) {
  if (rate == 0) return 1 / years;
  return rate / -std::expm1(-years * std::log1p(rate));
}

Cost cost_of(const Case& c) {
  constexpr double kSteelDensity = 7850;  // kg/m3
  const double wall_m = c.wall_mm * 1e-3;
  const double length = c.length_m();
  Cost cost;
  const double mass_kg = kSteelDensity * std::numbers::pi * (c.diameter_m + wall_m) * wall_m * length;
  cost.steel_mass_t = mass_kg * 1e-3;
  cost.steel = mass_kg * c.grade().price_per_kg;
  cost.coating = 2 * std::numbers::pi * (c.diameter_m + wall_m) * length * c.cost_coating_per_m2;
  cost.trench = length * (c.cost_trench_per_m + c.cost_trench_per_m2 * c.diameter_m);
  cost.jets = c.jets * c.cost_jet;
  cost.capital = c.cost_fixed + cost.steel + cost.coating + cost.trench + cost.jets;
  cost.annual = cost.capital * (annuity(c.interest_rate, c.life_years) + c.upkeep_rate);
  return cost;
}

}  // namespace penstock
