#include "surge.h"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <utility>

#include "case.h"

namespace penstock {

double wave_speed(double bulk_modulus, double density, double diameter_m, double wall_m, double modulus, double poisson,
                  bool anchored) {
  const double restraint = anchored ? 1 - poisson * poisson : 1;
  return std::sqrt(bulk_modulus / density) / std::sqrt(1 + restraint * bulk_modulus * diameter_m / (modulus * wall_m));
}

double opening(double share_of_closing_time) {
  const double x = std::clamp(share_of_closing_time, 0.0, 1.0);
  return 1 - x * x * (3 - 2 * x);
}

Surge::Surge(SurgeSetup setup) : setup_(std::move(setup)) {
  const std::size_t nodes = setup_.elevation_m.size();
  const double reaches = static_cast<double>(nodes - 1);
  const double area = std::numbers::pi / 4 * setup_.diameter_m * setup_.diameter_m;
  const double velocity_head = 1 / (2 * kGravity * area * area);  // for a flow of 1
  step_s_ = setup_.length_m / reaches / setup_.wave_speed_mps;
  impedance_ = setup_.wave_speed_mps / (kGravity * area);
  resistance_ = (setup_.friction * setup_.length_m / setup_.diameter_m + setup_.loss_bends) * velocity_head / reaches;
  intake_ = setup_.loss_intake * velocity_head;

  const double flow = setup_.flow_m3s;
  head_.resize(nodes);
  for (std::size_t node = 0; node < nodes; ++node) {
    head_[node] = setup_.reservoir_m - (intake_ + resistance_ * static_cast<double>(node)) * flow * flow;
  }
  flow_up_.assign(nodes, flow);
  flow_down_.assign(nodes, flow);
  cavity_.assign(nodes, 0);
  next_head_ = head_;
  next_up_ = flow_up_;
  next_down_ = flow_down_;
  nozzle_ = flow / std::sqrt(net_head_m());
}

double Surge::plus(std::size_t node) const {
  const double flow = flow_down_[node - 1];
  return head_[node - 1] + flow * (impedance_ - resistance_ * std::abs(flow));
}

double Surge::minus(std::size_t node) const {
  const double flow = flow_up_[node + 1];
  return head_[node + 1] - flow * (impedance_ - resistance_ * std::abs(flow));
}

void Surge::step() {
  ++steps_;
  step_intake();
  for (std::size_t node = 1; node + 1 < head_.size(); ++node) step_inside(node);
  step_nozzles();
  std::swap(head_, next_head_);
  std::swap(flow_up_, next_up_);
  std::swap(flow_down_, next_down_);
}

void Surge::step_intake() {
  // minus + impedance Q = reservoir - intake Q |Q|: written so that nothing cancels, with or without a loss.
  const double drive = setup_.reservoir_m - minus(0);
  const double flow = 2 * drive / (impedance_ + std::sqrt(impedance_ * impedance_ + 4 * intake_ * std::abs(drive)));
  next_head_[0] = minus(0) + impedance_ * flow;
  next_up_[0] = next_down_[0] = flow;
}

void Surge::step_inside(std::size_t node) {
  const double from_up = plus(node), from_down = minus(node);
  const double vapour_head = setup_.elevation_m[node] + setup_.vapour_head_m;
  const double head = (from_up + from_down) / 2;
  if (cavity_[node] > 0 || head < vapour_head) {
    keep_cavity(node, vapour_head, (from_up - vapour_head) / impedance_, (vapour_head - from_down) / impedance_);
    if (cavity_[node] > 0) return;
  }
  next_head_[node] = head;
  next_up_[node] = next_down_[node] = (from_up - from_down) / (2 * impedance_);
}

void Surge::step_nozzles() {
  const std::size_t node = head_.size() - 1;
  const double from_up = plus(node);
  const double open = nozzle_ * opening(time_s() / setup_.closing_time_s);
  const double conductance = open * open;
  const double drive = from_up - setup_.elevation_m[node];
  double flow = 0;  // a jet only leaves; nothing is drawn in through it
  if (drive > 0 && conductance > 0) {
    const double damping = impedance_ * conductance;
    flow = 2 * conductance * drive / (damping + std::sqrt(damping * damping + 4 * conductance * drive));
  }
  const double vapour_head = setup_.elevation_m[node] + setup_.vapour_head_m;
  const double head = from_up - impedance_ * flow;
  if (cavity_[node] > 0 || head < vapour_head) {
    keep_cavity(node, vapour_head, (from_up - vapour_head) / impedance_, 0);
    if (cavity_[node] > 0) return;
  }
  next_head_[node] = head;
  next_up_[node] = next_down_[node] = flow;
}

// The pressure stays at the vapour's while the columns on both sides part and meet again. The volume grows with the
// flows at the step's end: the weighting that damps most.
void Surge::keep_cavity(std::size_t node, double vapour_head, double flow_up, double flow_down) {
  cavity_[node] = std::max(cavity_[node] + step_s_ * (flow_down - flow_up), 0.0);
  next_head_[node] = vapour_head;
  next_up_[node] = flow_up;
  next_down_[node] = flow_down;
}

}  // namespace penstock
