#include "study/asking.h"

#include <algorithm>
#include <limits>

#include "absl/strings/str_cat.h"

namespace drover::study {
namespace {

std::int64_t affordable(const Standing& standing) {
  if (standing.budget == 0) return std::numeric_limits<std::int64_t>::max();
  return std::max<std::int64_t>(0, (standing.budget - standing.used - standing.open) / standing.runs_per_candidate);
}

// Candidates that should be out (asked and not yet absorbed).
std::int64_t window(const Standing& standing) {
  if (standing.order == v1::ORDER_CANDIDATE) return standing.look_ahead;
  const std::int64_t busy = std::max(standing.parallel, standing.slots);
  const std::int64_t runs = busy + std::max<std::int64_t>(1, busy / 4);
  return (runs + standing.runs_per_candidate - 1) / standing.runs_per_candidate + 1;
}

}  // namespace

bool budget_spent(const Standing& standing) { return affordable(standing) == 0; }

std::int64_t candidates_wanted(const Standing& standing) {
  if (standing.state != v1::STUDY_STATE_ACTIVE || standing.deadline_passed) return 0;
  const std::int64_t wanted = standing.absorbed + window(standing) - standing.asked;
  return std::clamp<std::int64_t>(wanted, 0, affordable(standing));
}

Turn next_turn(const Standing& standing, bool converged, bool dry, const std::string& sentence,
               v1::StopReason reason_so_far) {
  if (standing.state == v1::STUDY_STATE_ACTIVE) {
    if (converged) return {v1::STUDY_STATE_FINISHING, v1::STOP_REASON_CONVERGED, sentence};
    if (standing.deadline_passed) {
      return {v1::STUDY_STATE_FINISHING, v1::STOP_REASON_DEADLINE, "the deadline has passed"};
    }
    if (budget_spent(standing)) {
      return {v1::STUDY_STATE_FINISHING, v1::STOP_REASON_BUDGET,
              absl::StrCat("the budget of ", standing.budget, " runs is used up; ", sentence)};
    }
    if (dry) return {v1::STUDY_STATE_FINISHING, v1::STOP_REASON_CONVERGED, sentence};
  }
  const bool finishing = standing.state == v1::STUDY_STATE_FINISHING;
  if (finishing && standing.open == 0 && standing.absorbed == standing.learned) {
    return {v1::STUDY_STATE_FINISHED, reason_so_far, sentence};
  }
  return {};
}

}  // namespace drover::study
