#include "search/space.h"

#include <algorithm>
#include <cmath>
#include <cstring>
#include <limits>
#include <utility>

#include "absl/status/status.h"
#include "absl/strings/str_cat.h"

namespace drover::search {
namespace {

// 2^50: up to here the middle of every level is told from the next one's in double precision, with room to spare.
constexpr double kMostLevels = 1'125'899'906'842'624.0;

absl::Status bad(std::size_t i, const char* why) {
  return absl::InvalidArgumentError(absl::StrCat("variable ", i + 1, " ", why));
}

// How many values a discrete variable takes; the last step may fall a few roundings short of the upper bound.
absl::StatusOr<std::int64_t> levels_of(std::size_t i, const Variable& variable) {
  if (variable.kind == Kind::kChoice) {
    if (variable.choices < 1) return bad(i, "has no choices");
    return variable.choices;
  }
  const double step = variable.kind == Kind::kInteger ? 1.0 : variable.step;
  if (!(step > 0.0) || !std::isfinite(step)) return bad(i, "has a step that is not above 0");
  const double steps = (variable.high - variable.low) / step;
  if (!(steps < kMostLevels)) return bad(i, "has too many levels");
  const double rounding = std::min(0.25, 1e-9 + 8.0 * std::numeric_limits<double>::epsilon() * steps);
  return static_cast<std::int64_t>(std::floor(variable.kind == Kind::kInteger ? steps : steps + rounding)) + 1;
}

absl::Status check_bounds(std::size_t i, const Variable& variable) {
  if (variable.kind == Kind::kChoice) return absl::OkStatus();
  if (!std::isfinite(variable.low) || !std::isfinite(variable.high)) return bad(i, "has a bound that is not finite");
  const bool real = variable.kind == Kind::kReal;
  if (real ? !(variable.low < variable.high) : !(variable.low <= variable.high)) return bad(i, "has low above high");
  if (!std::isfinite(variable.high - variable.low)) return bad(i, "has too wide a range");
  const bool whole = variable.low == std::floor(variable.low) && variable.high == std::floor(variable.high);
  if (variable.kind == Kind::kInteger && !whole) {
    return bad(i, "is an integer and has a bound that is none");
  }
  if (variable.scale == Scale::kLog && !(real && variable.low > 0.0)) return bad(i, "has no logarithm");
  return absl::OkStatus();
}

void add_number(std::string& text, double number) {
  char bytes[sizeof(number)];
  std::memcpy(bytes, &number, sizeof(number));
  text.append(bytes, sizeof(number));
}

}  // namespace

absl::StatusOr<Space> Space::make(std::vector<Variable> variables, std::vector<double> baseline) {
  if (variables.empty()) return absl::InvalidArgumentError("a design space has one variable or more");
  if (!baseline.empty() && baseline.size() != variables.size()) {
    return absl::InvalidArgumentError("the baseline has another number of values than there are variables");
  }
  Space space;
  space.discrete_ = true;
  space.count_ = 1;
  for (std::size_t i = 0; i < variables.size(); ++i) {
    if (const absl::Status bounds = check_bounds(i, variables[i]); !bounds.ok()) return bounds;
    if (variables[i].kind == Kind::kReal) {
      space.discrete_ = false;
      space.levels_.push_back(0);
      continue;
    }
    const absl::StatusOr<std::int64_t> levels = levels_of(i, variables[i]);
    if (!levels.ok()) return levels.status();
    space.levels_.push_back(*levels);
    const bool over = space.count_ > std::numeric_limits<std::int64_t>::max() / *levels;
    space.count_ = over ? std::numeric_limits<std::int64_t>::max() : space.count_ * *levels;
  }
  if (!space.discrete_) space.count_ = std::numeric_limits<std::int64_t>::max();
  space.variables_ = std::move(variables);
  if (!baseline.empty()) {
    for (const double value : baseline) {
      if (!std::isfinite(value)) return absl::InvalidArgumentError("the baseline has a value that is not finite");
    }
    space.baseline_ = space.from_user(baseline);
    for (std::size_t i = 0; i < baseline.size(); ++i) {
      const Variable& variable = space.variables_[i];
      const bool real = variable.kind == Kind::kReal;
      space.baseline_values_.push_back(real ? std::clamp(baseline[i], variable.low, variable.high)
                                            : space.to_user(i, space.baseline_[i]));
    }
  }
  return space;
}

std::int64_t Space::level(std::size_t i, double coordinate) const {
  const auto levels = static_cast<double>(levels_[i]);
  const double level = std::floor(std::clamp(coordinate, 0.0, 1.0) * levels);
  return static_cast<std::int64_t>(std::min(level, levels - 1.0));
}

double Space::at_level(std::size_t i, std::int64_t level) const {
  return (static_cast<double>(level) + 0.5) / static_cast<double>(levels_[i]);
}

double Space::snap(std::size_t i, double coordinate) const {
  if (levels_[i] == 0) return std::clamp(coordinate, 0.0, 1.0);
  return at_level(i, level(i, coordinate));
}

Point Space::snap(const Point& point) const {
  Point snapped(point.size());
  for (std::size_t i = 0; i < point.size(); ++i) snapped[i] = snap(i, point[i]);
  return snapped;
}

double Space::to_user(std::size_t i, double coordinate) const {
  const Variable& variable = variables_[i];
  switch (variable.kind) {
    case Kind::kChoice:
      return static_cast<double>(level(i, coordinate));
    case Kind::kInteger:
      return variable.low + static_cast<double>(level(i, coordinate));
    case Kind::kStepped:
      return std::min(variable.low + static_cast<double>(level(i, coordinate)) * variable.step, variable.high);
    case Kind::kReal:
      break;
  }
  // The ends are exact, whatever the arithmetic between them does.
  if (coordinate <= 0.0) return variable.low;
  if (coordinate >= 1.0) return variable.high;
  const double value =
      variable.scale == Scale::kLog
          ? std::exp(std::log(variable.low) * (1.0 - coordinate) + std::log(variable.high) * coordinate)
          : variable.low + coordinate * (variable.high - variable.low);
  return std::clamp(value, variable.low, variable.high);
}

std::vector<double> Space::to_user(const Point& point) const {
  // Today's design has the numbers that were given for it, whatever a logarithm there and back makes of them.
  if (!baseline_.empty() && point == baseline_) return baseline_values_;
  std::vector<double> values(point.size());
  for (std::size_t i = 0; i < point.size(); ++i) values[i] = to_user(i, point[i]);
  return values;
}

double Space::from_user(std::size_t i, double value) const {
  const Variable& variable = variables_[i];
  if (levels_[i] > 0) {
    const double low = variable.kind == Kind::kChoice ? 0.0 : variable.low;
    const double place = variable.kind == Kind::kStepped ? (value - low) / variable.step : value - low;
    const double last = static_cast<double>(levels_[i]) - 1.0;
    return at_level(i, static_cast<std::int64_t>(std::clamp(std::round(place), 0.0, last)));
  }
  if (value <= variable.low) return 0.0;
  if (value >= variable.high) return 1.0;
  const double share = variable.scale == Scale::kLog ? (std::log(value) - std::log(variable.low)) /
                                                           (std::log(variable.high) - std::log(variable.low))
                                                     : (value - variable.low) / (variable.high - variable.low);
  return std::clamp(share, 0.0, 1.0);
}

Point Space::from_user(std::span<const double> values) const {
  Point point(values.size());
  for (std::size_t i = 0; i < values.size(); ++i) point[i] = from_user(i, values[i]);
  return point;
}

std::string Space::fingerprint() const {
  std::string text;
  for (const Variable& variable : variables_) {
    text.push_back(static_cast<char>('0' + static_cast<int>(variable.kind)));
    text.push_back(static_cast<char>('0' + static_cast<int>(variable.scale)));
    add_number(text, variable.kind == Kind::kChoice ? variable.choices : variable.low);
    add_number(text, variable.high);
    add_number(text, variable.kind == Kind::kStepped ? variable.step : 0.0);
  }
  for (const double coordinate : baseline_) add_number(text, coordinate);
  return text;
}

}  // namespace drover::search
