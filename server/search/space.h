// The design space as a search sees it: the unit cube, with what each coordinate means to the user.
#pragma once

#include <cstdint>
#include <span>
#include <string>
#include <vector>

#include "absl/status/statusor.h"

namespace drover::search {

using Point = std::vector<double>;  // one coordinate a variable, each in [0, 1]

enum class Kind { kReal, kStepped, kInteger, kChoice };
enum class Scale { kLinear, kLog };

// A design variable. Values are in the user's units; of a choice they are the index of the text, 0-based.
struct Variable {
  Kind kind = Kind::kReal;
  double low = 0.0;  // both ends can be reached; of a choice not used
  double high = 1.0;
  double step = 0.0;             // kStepped: above 0; values are low, low + step, ... up to high. Else not used.
  Scale scale = Scale::kLinear;  // kLog: kReal with low > 0 only
  int choices = 0;               // kChoice: 1 or more. Else not used.
};

// Immutable; safe from several threads.
//
// A real variable's coordinate is its share of the way from low to high, on a logarithm where asked. A discrete one
// with L levels has its level k in the middle of its own L-th of [0, 1], at (k + 0.5) / L, so that all levels are as
// wide and a uniform draw finds each as often.
class Space {
 public:
  // INVALID_ARGUMENT: no variables, low >= high (kInteger and kStepped: low > high), a bound that is not finite (or of
  // an integer no whole number), a step of 0 or less, a logarithm of 0 or less, fewer than 1 choice, 2^50 levels or
  // more, a baseline of another size or with a number that is not finite.
  // `baseline` in the user's units; empty: there is none. It is moved into the bounds and onto its step.
  static absl::StatusOr<Space> make(std::vector<Variable> variables, std::vector<double> baseline = {});

  std::size_t size() const { return variables_.size(); }
  const Variable& variable(std::size_t i) const { return variables_[i]; }

  // How many values the variable can take; 0 for a real one.
  std::int64_t levels(std::size_t i) const { return levels_[i]; }
  // Whether every variable is discrete; `count` is then the number of different points (saturating at INT64_MAX).
  bool discrete() const { return discrete_; }
  std::int64_t count() const { return count_; }

  // The nearest point of the space: coordinates clipped to [0, 1], discrete ones put on their level's middle.
  Point snap(const Point& point) const;
  double snap(std::size_t i, double coordinate) const;
  // 0-based level of a discrete variable.
  std::int64_t level(std::size_t i, double coordinate) const;
  double at_level(std::size_t i, std::int64_t level) const;

  // In the user's units, on the step; never outside the bounds. A choice gives its index.
  // Of the baseline exactly the numbers that were given for it.
  std::vector<double> to_user(const Point& point) const;
  double to_user(std::size_t i, double coordinate) const;
  // The inverse. `values` outside the bounds are moved to the nearer bound.
  Point from_user(std::span<const double> values) const;
  double from_user(std::size_t i, double value) const;

  // Today's design as a point; empty: there is none.
  const Point& baseline() const { return baseline_; }

  // Of what the space is, for a saved state to be compared with: equal spaces, equal texts.
  std::string fingerprint() const;

 private:
  Space() = default;
  std::vector<Variable> variables_;
  std::vector<std::int64_t> levels_;
  Point baseline_;
  std::vector<double> baseline_values_;
  bool discrete_ = false;
  std::int64_t count_ = 0;
};

}  // namespace drover::search
