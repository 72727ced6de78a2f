// The penstock at work: friction, net head and power at the river's flow.
#pragma once

#include "case.h"

namespace penstock {

// Darcy friction factor of turbulent flow: 1/sqrt f = -2 log10((e/D)/3.7 + 2.51/(Re sqrt f)), by Newton's method to
// the last bits. `roughness` is e/D, 0 or more; Re above 0. Colebrook (1939), J. Inst. Civil Engineers 11, 133-156.
double colebrook(double reynolds, double roughness);

// Darcy friction factor: 64/Re up to Re = 2300, Colebrook's from 4000 on, and in between, where nobody knows it, a
// straight line from the one to the other.
double friction_factor(double reynolds, double roughness);

// Share of the best efficiency that the runner has at `load`, the flow of one jet divided by its rated flow (above 0),
// with `open` jets at work. Flat around three quarters of the load, falling off at a quarter; each further jet costs
// a little, because its water meets the others'. The shape is usual for impulse turbines; the numbers are made up.
double runner_share(double load, int open);

struct Steady {
  double flow_m3s = 0;  // through the pipe: the river's, but not more than the rated flow
  double velocity_mps = 0;
  double reynolds = 0;
  double friction = 0;         // Darcy's factor
  double friction_loss_m = 0;  // f (L/D) V2/2g
  double minor_loss_m = 0;     // intake and bends
  double net_head_m = 0;       // at the nozzles; not above 0: this pipe cannot carry the flow
  int jets_open = 0;           // the number with the best efficiency; the others are shut
  double jet_load = 0;         // flow of an open jet divided by its rated flow
  double efficiency = 0;       // of nozzles, runner and generator together
  double power_kw = 0;         // electrical
};

// The velocity head in the pipe (a few decimetres) is neglected against the net head, as is usual for penstocks.
Steady steady_state(const Case& c);

}  // namespace penstock
