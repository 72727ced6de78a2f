// What a candidate is worth, from what its runs gave.
#include <algorithm>
#include <cmath>
#include <utility>
#include <variant>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "status/try.h"
#include "study/bytes.h"
#include "study/plan.h"
#include "study/plan_parts.h"
#include "study/wording.h"

namespace drover::study {
namespace {

const v1::AttemptReport* report_of(std::span<const RunResult> runs, int cell, int replicate) {
  for (const RunResult& run : runs) {
    if (run.condition == cell && run.replicate == replicate) return &run.report;
  }
  return nullptr;
}

bool settles(const v1::AttemptReport& report) {
  return report.ending() == v1::ENDING_EVALUATED || report.ending() == v1::ENDING_FAILED ||
         report.ending() == v1::ENDING_BOUNDED;
}

double seconds(const google::protobuf::Duration& span) {
  return static_cast<double>(span.seconds()) + 1e-9 * static_cast<double>(span.nanos());
}

double across_cells(std::span<const double> values, std::span<const double> weights, const v1::Objective& objective) {
  switch (objective.across()) {
    case v1::ACROSS_WORST:
      return worst(values, objective.sense());
    case v1::ACROSS_QUANTILE:
      return weighted_quantile(values, weights, objective.quantile(), objective.sense());
    default:
      return weighted_mean(values, weights);
  }
}

double across_cells(std::span<const double> values, std::span<const double> weights, const v1::Constraint& constraint,
                    const Limits& limits) {
  if (constraint.across() == v1::ACROSS_MEAN) return weighted_mean(values, weights);
  return *std::max_element(values.begin(), values.end(),
                           [&](double a, double b) { return excess(limits, a) < excess(limits, b); });
}

// Adds element by element; an empty sum takes the size of what comes first.
void add_to(std::vector<double>& sum, std::span<const double> numbers) {
  if (sum.empty()) sum.assign(numbers.size(), 0.0);
  for (std::size_t i = 0; i < numbers.size(); ++i) sum[i] += numbers[i];
}

struct Failure {
  v1::FailureKind kind = v1::FAILURE_KIND_UNSPECIFIED;
  std::string reason;
};

// What one run gives to objectives and constraints, or why it gives nothing.
std::variant<std::vector<double>, Failure> measure_run(const Measuring& measuring, std::span<const double> values,
                                                       std::span<const double> conditions,
                                                       const v1::AttemptReport& report) {
  if (report.ending() == v1::ENDING_FAILED) return Failure{report.failure(), report.reason()};
  if (report.ending() == v1::ENDING_BOUNDED) {
    return Failure{v1::FAILURE_KIND_CHECK, absl::StrCat("stopped early: ", report.reason())};
  }
  const absl::StatusOr<std::vector<double>> numbers = measuring.numbers(values, conditions, report);
  if (!numbers.ok()) return Failure{v1::FAILURE_KIND_CHECK, std::string(numbers.status().message())};
  std::vector<double> seen;
  for (const Measure& measure : measuring.objectives()) seen.push_back(measure.of(*numbers));
  for (const Measure& measure : measuring.constraints()) seen.push_back(measure.of(*numbers));
  return seen;
}

// "condition 2 (river_flow = 0.35 m3/s): "; empty for a study without conditions.
std::string condition_text(int cell, std::span<const v1::NamedValue> values) {
  std::vector<std::string> given;
  for (const v1::NamedValue& value : values) {
    given.push_back(
        absl::StrCat(value.name(), " = ", number_text(value.number()), value.unit().empty() ? "" : " ", value.unit()));
  }
  return given.empty() ? "" : absl::StrCat("condition ", cell + 1, " (", absl::StrJoin(given, ", "), "): ");
}

std::vector<double> column(const std::vector<std::vector<double>>& means, std::size_t index) {
  std::vector<double> numbers;
  for (const std::vector<double>& cell : means) numbers.push_back(cell[index]);
  return numbers;
}

}  // namespace

CandidateScore StudyPlan::score(std::span<const double> values, std::span<const RunResult> runs) const {
  CandidateScore score;
  double cost_s = 0.0;
  bool withdrawn = false;
  std::vector<std::vector<double>> means;  // by cell: objectives, then constraints
  for (int cell = 0; cell < static_cast<int>(parts_->cells.size()); ++cell) {
    std::vector<double> sum;
    for (int replicate = 0; replicate < replicates(); ++replicate) {
      const v1::AttemptReport* const report = report_of(runs, cell, replicate);
      if (report == nullptr || !settles(*report)) {
        withdrawn = true;
        continue;
      }
      cost_s += seconds(report->usage().wall());
      const auto seen =
          measure_run(parts_->measuring, values, parts_->cells[static_cast<std::size_t>(cell)].values, *report);
      if (const auto* const numbers = std::get_if<std::vector<double>>(&seen)) {
        add_to(sum, *numbers);
      } else if (score.verdict() != v1::CANDIDATE_VERDICT_FAILED) {  // the first one is told
        const Failure& failure = std::get<Failure>(seen);
        score.set_verdict(v1::CANDIDATE_VERDICT_FAILED);
        score.set_failure(failure.kind);
        score.set_reason(condition_text(cell, condition_values(cell)) + failure.reason);
      }
    }
    for (double& number : sum) number /= replicates();
    means.push_back(std::move(sum));
  }
  score.set_cost_s(cost_s);
  if (score.verdict() == v1::CANDIDATE_VERDICT_FAILED) return score;
  if (withdrawn) {
    score.set_verdict(v1::CANDIDATE_VERDICT_WITHDRAWN);
    return score;
  }
  return judge(std::move(score), means);
}

CandidateScore StudyPlan::judge(CandidateScore score, const std::vector<std::vector<double>>& means) const {
  const Parts& p = *parts_;
  std::vector<double> objectives, constraints, violations;
  for (int i = 0; i < p.spec.objectives_size(); ++i) {
    const v1::Objective& objective = p.spec.objectives(i);
    const double value = across_cells(column(means, static_cast<std::size_t>(i)), p.weights, objective);
    objectives.push_back(objective.sense() == v1::SENSE_MAXIMISE ? -value : value);
  }
  double violation = 0.0;
  for (int i = 0; i < p.spec.constraints_size(); ++i) {
    const v1::Constraint& constraint = p.spec.constraints(i);
    const Limits& limits = p.limits[static_cast<std::size_t>(i)];
    const auto index = static_cast<std::size_t>(p.spec.objectives_size() + i);
    const double value = across_cells(column(means, index), p.weights, constraint, limits);
    const double scale = constraint.scale() > 0.0 ? constraint.scale() : usual_scale(constraint);
    constraints.push_back(value);
    violations.push_back(std::max(0.0, excess(limits, value)) / scale);
    violation += violations.back();
  }
  score.set_verdict(violation > 0.0 ? v1::CANDIDATE_VERDICT_INFEASIBLE : v1::CANDIDATE_VERDICT_FEASIBLE);
  score.set_objectives(pack_doubles(objectives));
  score.set_constraints(pack_doubles(constraints));
  score.set_violations(pack_doubles(violations));
  score.set_violation(pack_double(violation));
  return score;
}

absl::StatusOr<search::Outcome> StudyPlan::to_outcome(const search::Ask& ask, const CandidateScore& score) const {
  search::Outcome outcome;
  outcome.ask = ask.number;
  outcome.point = ask.point;
  outcome.cost = score.cost_s();
  switch (score.verdict()) {
    case v1::CANDIDATE_VERDICT_FAILED:
      outcome.verdict = search::Verdict::kFailed;
      // The two lists have the same order.
      outcome.failure = static_cast<search::FailureKind>(score.failure());
      return outcome;
    case v1::CANDIDATE_VERDICT_WITHDRAWN:
      outcome.verdict = search::Verdict::kWithdrawn;
      return outcome;
    case v1::CANDIDATE_VERDICT_FEASIBLE:
    case v1::CANDIDATE_VERDICT_INFEASIBLE:
      break;
    default:
      return absl::InvalidArgumentError("the score has no verdict");
  }
  outcome.verdict = search::Verdict::kEvaluated;
  DROVER_ASSIGN(outcome.objectives, unpack_doubles(score.objectives()));
  DROVER_ASSIGN(outcome.constraints, unpack_doubles(score.violations()));
  DROVER_ASSIGN(outcome.violation, unpack_double(score.violation()));
  if (outcome.objectives.size() != static_cast<std::size_t>(parts_->spec.objectives_size()) ||
      outcome.constraints.size() != static_cast<std::size_t>(parts_->spec.constraints_size())) {
    return absl::InvalidArgumentError("the score is of another study");
  }
  return outcome;
}

std::vector<v1::NamedValue> StudyPlan::shown_objectives(const CandidateScore& score) const {
  std::vector<v1::NamedValue> shown;
  const absl::StatusOr<std::vector<double>> values = unpack_doubles(score.objectives());
  if (!values.ok() || values->size() != static_cast<std::size_t>(parts_->spec.objectives_size())) return shown;
  for (std::size_t i = 0; i < values->size(); ++i) {
    const v1::Objective& objective = parts_->spec.objectives(static_cast<int>(i));
    v1::NamedValue& value = shown.emplace_back();
    value.set_name(objective.name());
    value.set_unit(parts_->measuring.objectives()[i].unit);
    value.set_number(objective.sense() == v1::SENSE_MAXIMISE ? -(*values)[i] : (*values)[i]);
  }
  return shown;
}

std::vector<v1::NamedValue> StudyPlan::shown_constraints(const CandidateScore& score) const {
  std::vector<v1::NamedValue> shown;
  const absl::StatusOr<std::vector<double>> values = unpack_doubles(score.constraints());
  if (!values.ok() || values->size() != static_cast<std::size_t>(parts_->spec.constraints_size())) return shown;
  for (std::size_t i = 0; i < values->size(); ++i) {
    v1::NamedValue& value = shown.emplace_back();
    value.set_name(parts_->spec.constraints(static_cast<int>(i)).name());
    value.set_unit(parts_->measuring.constraints()[i].unit);
    value.set_number((*values)[i]);
  }
  return shown;
}

v1::CellResult StudyPlan::cell_result(std::span<const double> values, int cell, std::span<const RunResult> runs) const {
  const Parts& p = *parts_;
  v1::CellResult result;
  result.set_condition(cell);
  result.set_weight(p.cells[static_cast<std::size_t>(cell)].weight);
  for (v1::NamedValue& value : condition_values(cell)) *result.add_condition_values() = std::move(value);
  std::vector<double> sum;
  int counted = 0;
  for (int replicate = 0; replicate < replicates(); ++replicate) {
    const v1::AttemptReport* const report = report_of(runs, cell, replicate);
    if (report == nullptr || report->ending() != v1::ENDING_EVALUATED) continue;
    const absl::StatusOr<std::vector<double>> numbers =
        p.measuring.numbers(values, p.cells[static_cast<std::size_t>(cell)].values, *report);
    if (!numbers.ok()) continue;
    add_to(sum, *numbers);
    ++counted;
  }
  for (std::size_t i = 0; i < sum.size(); ++i) {
    v1::NamedValue& value = *result.add_outputs();
    value.set_name(p.measuring.names()[i]);
    value.set_unit(p.measuring.units()[i]);
    value.set_number(sum[i] / counted);
  }
  return result;
}

}  // namespace drover::study
