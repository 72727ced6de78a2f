#include "study/plan.h"

#include <algorithm>
#include <utility>

#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "study/bytes.h"
#include "study/plan_parts.h"
#include "study/wording.h"

namespace drover::study {
namespace {

search::Variable search_variable(const v1::Variable& variable) {
  search::Variable made{.low = variable.low(), .high = variable.high(), .step = variable.step(),
                        .choices = variable.choices_size()};
  switch (variable.kind()) {
    case v1::VARIABLE_KIND_STEPPED: made.kind = search::Kind::kStepped; break;
    case v1::VARIABLE_KIND_INTEGER: made.kind = search::Kind::kInteger; break;
    case v1::VARIABLE_KIND_CHOICE: made.kind = search::Kind::kChoice; break;
    default: made.kind = search::Kind::kReal; break;
  }
  if (variable.scale() == v1::SCALE_LOG) made.scale = search::Scale::kLog;
  return made;
}

// Today's design; empty unless every variable has a baseline.
std::vector<double> baseline_of(const v1::StudySpec& spec) {
  std::vector<double> baseline;
  for (const v1::Variable& variable : spec.variables()) {
    if (variable.kind() != v1::VARIABLE_KIND_CHOICE) {
      if (!variable.has_baseline()) return {};
      baseline.push_back(variable.baseline());
      continue;
    }
    const auto at = std::find(variable.choices().begin(), variable.choices().end(), variable.baseline_choice());
    if (!variable.has_baseline_choice() || at == variable.choices().end()) return {};
    baseline.push_back(static_cast<double>(at - variable.choices().begin()));
  }
  return baseline;
}

absl::StatusOr<search::Space> space_of(const v1::StudySpec& spec) {
  std::vector<search::Variable> variables;
  for (const v1::Variable& variable : spec.variables()) variables.push_back(search_variable(variable));
  return search::Space::make(std::move(variables), baseline_of(spec));
}

search::Settings settings_of(const v1::SearchSpec& search) {
  return {.method = search.method(), .seed = search.seed(), .parallel = search.parallel(),
          .population = search.population(), .tolerance = search.tolerance(), .share = search.share()};
}

template <class List>
int index_of(const List& list, const std::string& name) {
  const auto at = std::find_if(list.begin(), list.end(), [&](const auto& one) { return one.name() == name; });
  return at == list.end() ? -1 : static_cast<int>(at - list.begin());
}

absl::StatusOr<std::vector<InputSource>> inputs_of(const v1::StudySpec& spec, const v1::CodeDefinition& code) {
  std::vector<InputSource> inputs;
  for (const v1::Accepted& accepted : code.accepts()) {
    InputSource source{.name = accepted.name(), .unit = accepted.unit(),
                       .variable = index_of(spec.variables(), accepted.name()),
                       .condition = index_of(spec.conditions(), accepted.name())};
    if (source.variable < 0 && source.condition < 0) {
      return absl::InvalidArgumentError(absl::StrCat("the study gives no ", quoted(accepted.name())));
    }
    const std::string& unit = source.variable >= 0 ? spec.variables(source.variable).unit()
                                                   : spec.conditions(source.condition).unit();
    DROVER_ASSIGN(source.conversion, Units::shared().conversion(unit, accepted.unit()));
    inputs.push_back(std::move(source));
  }
  std::sort(inputs.begin(), inputs.end(), [](const auto& a, const auto& b) { return a.name < b.name; });
  return inputs;
}

int rank(v1::CandidateVerdict verdict) {
  switch (verdict) {
    case v1::CANDIDATE_VERDICT_FEASIBLE: return 0;
    case v1::CANDIDATE_VERDICT_INFEASIBLE: return 1;
    case v1::CANDIDATE_VERDICT_FAILED: return 2;
    default: return 3;
  }
}

}  // namespace

StudyPlan::StudyPlan(std::unique_ptr<Parts> parts) : parts_(std::move(parts)) {}
StudyPlan::~StudyPlan() = default;

absl::StatusOr<std::unique_ptr<StudyPlan>> StudyPlan::make(const v1::StudySpec& effective,
                                                           std::span<const v1::CodeDefinition> codes,
                                                           std::span<const CellValues> cells) {
  const v1::CodeDefinition* const code = find_code(effective, codes);
  if (code == nullptr) return absl::InvalidArgumentError("the definition of the study's code is not there");
  if (cells.empty()) return absl::InvalidArgumentError("a study has one cell or more");
  for (const CellValues& cell : cells) {
    if (cell.values.size() != static_cast<std::size_t>(effective.conditions_size())) {
      return absl::InvalidArgumentError("a cell has other conditions than the spec");
    }
  }
  DROVER_ASSIGN(search::Space space, space_of(effective));
  DROVER_ASSIGN(std::vector<InputSource> inputs, inputs_of(effective, *code));
  DROVER_ASSIGN(Measuring measuring, Measuring::make(effective, *code));
  auto parts = std::make_unique<Parts>(Parts{.spec = effective, .code = *code, .space = std::move(space),
                                             .settings = settings_of(effective.search()),
                                             .cells = {cells.begin(), cells.end()}, .inputs = std::move(inputs),
                                             .measuring = std::move(measuring)});
  for (const v1::Constraint& constraint : effective.constraints()) parts->limits.push_back(tightened(constraint));
  for (const CellValues& cell : cells) parts->weights.push_back(cell.weight);
  return std::unique_ptr<StudyPlan>(new StudyPlan(std::move(parts)));
}

const v1::StudySpec& StudyPlan::spec() const { return parts_->spec; }
const v1::CodeDefinition& StudyPlan::code() const { return parts_->code; }
const search::Space& StudyPlan::space() const { return parts_->space; }
const search::Settings& StudyPlan::settings() const { return parts_->settings; }
std::span<const CellValues> StudyPlan::cells() const { return parts_->cells; }
int StudyPlan::replicates() const { return std::max(1, parts_->spec.replicates()); }
int StudyPlan::runs_per_candidate() const { return static_cast<int>(parts_->cells.size()) * replicates(); }

std::vector<double> StudyPlan::user_values(const search::Point& point) const { return parts_->space.to_user(point); }

std::vector<v1::NamedValue> StudyPlan::named_values(std::span<const double> values) const {
  std::vector<v1::NamedValue> named;
  for (int i = 0; i < parts_->spec.variables_size(); ++i) {
    const v1::Variable& variable = parts_->spec.variables(i);
    v1::NamedValue& value = named.emplace_back();
    value.set_name(variable.name());
    value.set_unit(variable.unit());
    const double number = values[static_cast<std::size_t>(i)];
    if (variable.kind() == v1::VARIABLE_KIND_CHOICE) {
      value.set_text(variable.choices(static_cast<int>(number)));
    } else {
      value.set_number(number);
    }
  }
  return named;
}

std::vector<v1::NamedValue> StudyPlan::condition_values(int cell) const {
  std::vector<v1::NamedValue> named;
  for (int i = 0; i < parts_->spec.conditions_size(); ++i) {
    v1::NamedValue& value = named.emplace_back();
    value.set_name(parts_->spec.conditions(i).name());
    value.set_unit(parts_->spec.conditions(i).unit());
    value.set_number(parts_->cells[static_cast<std::size_t>(cell)].values[static_cast<std::size_t>(i)]);
  }
  return named;
}

std::vector<v1::NamedValue> StudyPlan::inputs(std::span<const double> values, int cell) const {
  const std::vector<double>& conditions = parts_->cells[static_cast<std::size_t>(cell)].values;
  std::vector<v1::NamedValue> given;
  for (const InputSource& source : parts_->inputs) {
    v1::NamedValue& value = given.emplace_back();
    value.set_name(source.name);
    value.set_unit(source.unit);
    if (source.variable < 0) {
      value.set_number(source.conversion.apply(conditions[static_cast<std::size_t>(source.condition)]));
      continue;
    }
    const v1::Variable& variable = parts_->spec.variables(source.variable);
    const double number = values[static_cast<std::size_t>(source.variable)];
    if (variable.kind() == v1::VARIABLE_KIND_CHOICE) {
      value.set_text(variable.choices(static_cast<int>(number)));
    } else {
      value.set_number(source.conversion.apply(number));
    }
  }
  return given;
}

bool StudyPlan::better(const CandidateScore& a, const CandidateScore& b) {
  if (rank(a.verdict()) != rank(b.verdict())) return rank(a.verdict()) < rank(b.verdict());
  const bool feasible = a.verdict() == v1::CANDIDATE_VERDICT_FEASIBLE;
  if (!feasible && a.verdict() != v1::CANDIDATE_VERDICT_INFEASIBLE) return false;
  const absl::StatusOr<std::vector<double>> mine = unpack_doubles(feasible ? a.objectives() : a.violation());
  const absl::StatusOr<std::vector<double>> other = unpack_doubles(feasible ? b.objectives() : b.violation());
  if (!mine.ok() || !other.ok() || mine->empty() || other->empty()) return false;
  return mine->front() < other->front();
}

}  // namespace drover::study
