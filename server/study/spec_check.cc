#include "study/spec_check.h"

#include <utility>

#include "study/findings.h"

namespace drover::study {
namespace {

// Each condition's weights are first made to add up to 1, so that the products do.
std::vector<CellValues> combinations(const v1::StudySpec& effective) {
  std::vector<CellValues> cells{CellValues{}};
  for (const v1::Condition& condition : effective.conditions()) {
    double sum = 0.0;
    for (const double weight : condition.weights()) sum += weight;
    std::vector<CellValues> longer;
    for (const CellValues& cell : cells) {
      for (int i = 0; i < condition.values_size(); ++i) {
        CellValues next = cell;
        next.values.push_back(condition.values(i));
        next.weight *= condition.weights(i) / sum;
        longer.push_back(std::move(next));
      }
    }
    cells = std::move(longer);
  }
  return cells;
}

}  // namespace

CheckResult check_spec(const v1::StudySpec& spec, const CheckContext& context) {
  Draft draft{.given = spec, .context = context, .effective = spec};
  check_study(draft);
  check_variables(draft);
  check_conditions(draft);
  check_coverage(draft);
  check_derived(draft);
  check_objectives(draft);
  check_constraints(draft);
  check_search(draft);
  check_budget(draft);
  CheckResult result;
  result.problems = draft.findings.take();
  if (!result.problems.empty()) return result;
  result.cells = combinations(draft.effective);
  result.runs_per_candidate = static_cast<int>(result.cells.size()) * draft.effective.replicates();
  result.effective = std::move(draft.effective);
  return result;
}

}  // namespace drover::study
