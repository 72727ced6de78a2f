// Water hammer in one pipe between a reservoir and a closing nozzle: the method of characteristics on a grid whose
// Courant number is exactly 1, with steady friction and discrete vapour cavities.
//
// Wylie and Streeter (1993), Fluid Transients in Systems; the discrete vapour cavity model as in Bergant, Simpson and
// Tijsseling (2006), Journal of Fluids and Structures 22, 135-171.
#pragma once

#include <vector>

namespace penstock {

// sqrt(K/rho) / sqrt(1 + c K D/(E t)) in m/s, with c = 1 for a pipe that can move lengthwise and 1 - poisson^2 for one
// that is anchored all along. Moduli in Pa, lengths in m.
double wave_speed(double bulk_modulus, double density, double diameter_m, double wall_m, double modulus, double poisson,
                  bool anchored);

// How far the nozzles are open at a share of the closing time, as a share of where they began: 1 up to 0, 0 from 1
// on, and between them 1 - 3x^2 + 2x^3, which begins and ends without a jerk.
double opening(double share_of_closing_time);

struct SurgeSetup {
  double length_m = 0;
  double diameter_m = 0;
  double wave_speed_mps = 0;
  double friction = 0;     // Darcy's factor, kept as it is in the steady flow; 0: no friction
  double loss_intake = 0;  // in velocity heads
  double loss_bends = 0;   // in velocity heads, spread along the pipe
  double reservoir_m = 0;
  std::vector<double> elevation_m;  // of every node: one more than there are reaches, at least 3
  double vapour_head_m = -10;       // pressure head at which water boils, against the atmosphere
  double flow_m3s = 0;              // steady, above 0; its net head at the nozzles must be above 0
  double closing_time_s = 0;        // above 0
};

// Node 0 is the intake, the last one the nozzles, which open into the air at the last node's elevation. A new Surge
// stands in the steady flow at time 0, when the nozzles begin to close. Not for several threads.
class Surge {
 public:
  explicit Surge(SurgeSetup setup);

  void step();  // by step_s()

  double step_s() const { return step_s_; }
  double time_s() const { return step_s_ * static_cast<double>(steps_); }
  const std::vector<double>& head_m() const { return head_; }       // piezometric
  const std::vector<double>& flow_m3s() const { return flow_up_; }  // arriving at a node from upstream
  const std::vector<double>& cavity_m3() const { return cavity_; }  // vapour at a node; 0: the column is whole
  double nozzle_flow_m3s() const { return flow_down_.back(); }
  double net_head_m() const { return head_.back() - setup_.elevation_m.back(); }

 private:
  double plus(std::size_t node) const;   // what the characteristic from upstream brings
  double minus(std::size_t node) const;  // what the one from downstream brings
  void step_intake();
  void step_inside(std::size_t node);
  void step_nozzles();
  void keep_cavity(std::size_t node, double vapour_head, double flow_up, double flow_down);

  SurgeSetup setup_;
  double step_s_;
  double impedance_;   // a/(g A)
  double resistance_;  // head lost in one reach is resistance Q |Q|
  double intake_;      // head lost at the intake is intake Q |Q|
  double nozzle_;      // Q = opening nozzle sqrt(net head)
  long steps_ = 0;
  std::vector<double> head_, flow_up_, flow_down_, cavity_;
  std::vector<double> next_head_, next_up_, next_down_;
};

}  // namespace penstock
