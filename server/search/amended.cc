#include "search/amended.h"

#include <cmath>

#include "absl/strings/str_cat.h"

namespace drover::search {
namespace {

constexpr double kOffStep = 1e-6;  // of a step: more than sums of steps round, less than anybody means

bool has_value(const Space& space, std::size_t i, double value) {
  const Variable& variable = space.variable(i);
  if (variable.kind == Kind::kChoice) return true;
  if (variable.kind != Kind::kStepped) return value >= variable.low && value <= variable.high;
  return std::abs(space.to_user(i, space.from_user(i, value)) - value) <= kOffStep * variable.step;
}

}  // namespace

absl::Status check_amendment(const Space& before, const Space& after) {
  if (after.size() != before.size()) {
    return absl::InvalidArgumentError("an amended space has as many variables as before");
  }
  for (std::size_t i = 0; i < after.size(); ++i) {
    const Variable &was = before.variable(i), &is = after.variable(i);
    const bool same = was.kind == is.kind && (is.kind != Kind::kChoice || was.choices == is.choices);
    if (!same) return absl::InvalidArgumentError(absl::StrCat("variable ", i + 1, " would become another kind"));
  }
  return absl::OkStatus();
}

std::optional<Point> point_in(const Space& after, const Space& before, const Point& point) {
  const std::vector<double> values = before.to_user(point);
  for (std::size_t i = 0; i < values.size(); ++i) {
    if (!has_value(after, i, values[i])) return std::nullopt;
  }
  return after.from_user(values);
}

}  // namespace drover::search
