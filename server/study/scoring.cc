#include "study/scoring.h"

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <numeric>
#include <vector>

namespace drover::study {

Limits tightened(const v1::Constraint& constraint) {
  Limits limits;
  const double allowance = constraint.allowance();
  if (constraint.has_at_least()) {
    limits.low = constraint.at_least() + allowance * std::abs(constraint.at_least());
  }
  if (constraint.has_at_most()) {
    limits.high = constraint.at_most() - allowance * std::abs(constraint.at_most());
  }
  return limits;
}

double usual_scale(const v1::Constraint& constraint) {
  const double low = constraint.has_at_least() ? std::abs(constraint.at_least()) : 0.0;
  const double high = constraint.has_at_most() ? std::abs(constraint.at_most()) : 0.0;
  const double size = std::max(low, high);
  return size > 0.0 ? size : 1.0;
}

double excess(const Limits& limits, double value) { return std::max(value - limits.high, limits.low - value); }

double weighted_mean(std::span<const double> values, std::span<const double> weights) {
  double sum = 0.0;
  for (std::size_t i = 0; i < values.size(); ++i) sum += weights[i] * values[i];
  return sum;
}

double worst(std::span<const double> values, v1::Sense sense) {
  return sense == v1::SENSE_MAXIMISE ? *std::min_element(values.begin(), values.end())
                                     : *std::max_element(values.begin(), values.end());
}

double weighted_quantile(std::span<const double> values, std::span<const double> weights, double q, v1::Sense sense) {
  std::vector<std::size_t> order(values.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  const bool maximise = sense == v1::SENSE_MAXIMISE;
  std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    return maximise ? values[a] < values[b] : values[a] > values[b];
  });
  // Weights such as 0.1 add up to a little more or less than they should.
  constexpr double kSlack = 1e-12;
  double weight = 0.0;
  for (const std::size_t i : order) {
    weight += weights[i];
    if (weight >= q - kSlack) return values[i];
  }
  return values[order.back()];
}

}  // namespace drover::study
