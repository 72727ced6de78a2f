// What the penstock and its jets cost.
#pragma once

#include "case.h"

namespace penstock {

// Money in the case's unit.
struct Cost {
  double steel_mass_t = 0;
  double steel = 0;
  double coating = 0;  // inside and outside
  double trench = 0;
  double jets = 0;
  double capital = 0;  // all of it, with what does not depend on the design
  double annual = 0;   // capital times annuity and upkeep
};

// Yearly share that pays back a loan over its life: r/(1 - (1 + r)^-n), or 1/n without interest.
double annuity(double rate, double years);

Cost cost_of(const Case& c);

}  // namespace penstock
