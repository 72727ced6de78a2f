#include "search/standing.h"

#include <algorithm>
#include <cmath>
#include <vector>

#include "absl/strings/str_cat.h"

namespace drover::search {
namespace {

bool all_finite(const std::vector<double>& numbers) {
  return std::all_of(numbers.begin(), numbers.end(), [](double number) { return std::isfinite(number); });
}

bool all_sizes(const std::vector<double>& numbers) {
  return all_finite(numbers) &&
         std::all_of(numbers.begin(), numbers.end(), [](double number) { return number >= 0.0; });
}

}  // namespace

Standing standing_of(const Outcome& outcome) {
  if (outcome.verdict != Verdict::kEvaluated) return {Rank::kFailed, 0.0, outcome.ask};
  if (outcome.violation > 0.0) return {Rank::kInfeasible, outcome.violation, outcome.ask};
  return {Rank::kFeasible, outcome.objectives.front(), outcome.ask};
}

absl::Status check_outcome(const Outcome& outcome, std::size_t variables) {
  const auto refuse = [&](const char* why) {
    return absl::InvalidArgumentError(absl::StrCat("outcome of ask ", outcome.ask, " ", why));
  };
  if (outcome.ask < 0) return refuse("has a number below 0");
  if (outcome.point.size() != variables) return refuse("has another number of coordinates than the space");
  if (!all_finite(outcome.point)) return refuse("has a coordinate that is not finite");
  if (outcome.verdict == Verdict::kFailed || outcome.verdict == Verdict::kWithdrawn) return absl::OkStatus();
  if (outcome.objectives.empty()) return refuse("has a value and no objective");
  if (!all_finite(outcome.objectives)) return refuse("has an objective that is not finite");
  if (!outcome.variances.empty() && outcome.variances.size() != outcome.objectives.size()) {
    return refuse("has another number of variances than of objectives");
  }
  if (!all_sizes(outcome.variances)) return refuse("has a variance that is no size");
  if (!all_sizes(outcome.constraints)) return refuse("has a constraint's violation that is no size");
  if (!all_sizes({outcome.violation})) return refuse("has a violation that is no size");
  return absl::OkStatus();
}

}  // namespace drover::search
