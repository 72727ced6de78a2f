// [[variable]] and [[condition]]: what the code is given.
#include <algorithm>
#include <cmath>
#include <set>

#include "absl/strings/ascii.h"
#include "absl/strings/str_cat.h"
#include "study/findings.h"
#include "study/limits.h"
#include "study/wording.h"

namespace drover::study {
namespace {

constexpr double kStepSlack = 1e-6;  // of a step: how far decimal bounds may lie from a whole number of steps

std::string quoted_code(const Draft& draft) { return absl::StrCat("code ", printable(draft.code->name(), 100)); }

// Names as code definitions have them.
bool is_input_name(const std::string& name) {
  const auto plain = [](char c) {
    return absl::ascii_isalnum(static_cast<unsigned char>(c)) || c == '-' || c == '_' || c == '.';
  };
  const bool begins = absl::ascii_isalpha(static_cast<unsigned char>(name.front())) || name.front() == '_';
  return begins && std::all_of(name.begin(), name.end(), plain);
}

void not_accepted(Draft& draft, const std::string& field, const std::string& name) {
  std::vector<std::string> accepts;
  for (const v1::Accepted& input : draft.code->accepts()) accepts.push_back(input.name());
  draft.findings.add(field, absl::StrCat(quoted_code(draft), " accepts no ", quoted(name)),
                     {absl::StrCat("it accepts ", listed(accepts)), draft.findings.nearest_for(name, accepts)});
}

// The name of a variable or condition, which enters the table of names. False when nothing more can be said of it.
bool check_name(Draft& draft, const std::string& table, int index, const std::string& name, NameUse use) {
  const std::string field = field_of(table, index, "name");
  if (name.empty()) {
    draft.findings.add(field, absl::StrCat("the ", table, " has no name"));
    return false;
  }
  if (!short_enough(draft, field, name, kMostNameLength)) return false;
  if (!is_input_name(name)) {
    draft.findings.add(field, absl::StrCat(quoted(name), " is no name for a ", table),
                       {"letters, digits, '_', '-' and '.', beginning with a letter or '_'", ""});
    return false;
  }
  use.field = field_of(table, index);
  const auto [place, fresh] = draft.inputs.emplace(name, use);
  if (!fresh) {
    draft.findings.add(field,
                       absl::StrCat(quoted(name), " is given twice: ", place->second.field, " has this name too"));
  }
  if (draft.code != nullptr && draft.accepted(name) == nullptr) not_accepted(draft, field, name);
  return true;
}

void check_input_unit(Draft& draft, const std::string& field, const std::string& unit, const std::string& name) {
  if (!short_enough(draft, field, unit, kMostUnitLength)) return;
  const v1::Accepted* const accepted = draft.accepted(name);
  if (accepted == nullptr) return;
  check_unit(draft, field, unit, accepted->unit(),
             absl::StrCat("the unit of ", printable(name, 100), " in ", quoted_code(draft)));
}

// --- variables ---

bool check_bounds(Draft& draft, int index, const v1::Variable& variable) {
  const std::string low = field_of("variable", index, "low"), high = field_of("variable", index, "high");
  const bool both = finite(draft, low, variable.low()) & finite(draft, high, variable.high());
  if (!both) return false;
  if (!(variable.low() < variable.high())) {
    draft.findings.add(low, absl::StrCat("low = ", number_text(variable.low()),
                                         " is not below high = ", number_text(variable.high())));
    return false;
  }
  if (!std::isfinite(variable.high() - variable.low())) {
    draft.findings.add(high, "the range is too wide for floating-point numbers");
    return false;
  }
  return true;
}

void check_whole(Draft& draft, int index, const v1::Variable& variable) {
  for (const auto& [key, value] : {std::pair<std::string, double>{"low", variable.low()}, {"high", variable.high()}}) {
    const std::string field = field_of("variable", index, key);
    if (value != std::floor(value)) {
      draft.findings.add(field, absl::StrCat(key, " = ", number_text(value), " is no integer"));
    } else if (std::abs(value) > kLargestInteger) {
      draft.findings.add(field, absl::StrCat(key, " = ", number_text(value), " is beyond 2^53"));
    }
  }
  if (variable.high() - variable.low() > kMostSteps) {
    draft.findings.add(field_of("variable", index, "high"),
                       absl::StrCat("more than ", number_text(kMostSteps), " values; use kind = \"real\""));
  }
}

void check_step(Draft& draft, int index, const v1::Variable& variable) {
  const std::string field = field_of("variable", index, "step");
  const double low = variable.low(), high = variable.high(), step = variable.step();
  if (!finite(draft, field, step)) return;
  if (!(step > 0.0)) {
    draft.findings.add(field, absl::StrCat("step = ", number_text(step), " is not above 0"));
    return;
  }
  const double steps = (high - low) / step;
  if (steps > kMostSteps) {
    draft.findings.add(field, absl::StrCat("more than ", number_text(kMostSteps), " steps; use kind = \"real\""));
  } else if (steps < 1.0 - kStepSlack) {
    draft.findings.add(field, absl::StrCat("step = ", number_text(step), " is larger than the range from ",
                                           number_text(low), " to ", number_text(high)));
  } else if (std::abs(steps - std::round(steps)) > kStepSlack) {
    draft.findings.add(
        field,
        absl::StrCat("steps of ", number_text(step), " from low = ", number_text(low),
                     " do not reach high = ", number_text(high)),
        {absl::StrCat("the last one below is about ", absl::SixDigits(low + std::floor(steps) * step)), ""});
  }
}

void check_scale(Draft& draft, int index, const v1::Variable& variable) {
  const std::string field = field_of("variable", index, "scale");
  if (!v1::Scale_IsValid(variable.scale())) draft.findings.add(field, "no such scale");
  if (variable.scale() != v1::SCALE_LOG) return;
  if (variable.kind() != v1::VARIABLE_KIND_REAL && variable.kind() != v1::VARIABLE_KIND_UNSPECIFIED) {
    draft.findings.add(field, "scale = \"log\" is for real variables only");
  } else if (!(variable.low() > 0.0)) {
    draft.findings.add(field, absl::StrCat("scale = \"log\" needs low above 0; it is ", number_text(variable.low())));
  }
}

void check_baseline(Draft& draft, int index, const v1::Variable& variable) {
  if (variable.has_baseline_choice()) {
    draft.findings.add(field_of("variable", index, "baseline"), "a text; the baseline of this variable is a number");
  }
  if (!variable.has_baseline()) return;
  const std::string field = field_of("variable", index, "baseline");
  const double value = variable.baseline(), low = variable.low(), high = variable.high();
  if (!finite(draft, field, value)) return;
  const std::string shown = absl::StrCat("baseline = ", number_text(value));
  if (value < low || value > high) {
    draft.findings.add(
        field, absl::StrCat(shown, " is not between low = ", number_text(low), " and high = ", number_text(high)));
    return;
  }
  const bool whole = variable.kind() == v1::VARIABLE_KIND_INTEGER;
  if (!whole && variable.kind() != v1::VARIABLE_KIND_STEPPED) return;
  const double step = whole ? 1.0 : variable.step();
  const double steps = (value - low) / step;
  if (step > 0.0 && std::abs(steps - std::round(steps)) > kStepSlack) {
    draft.findings.add(field,
                       whole ? absl::StrCat(shown, " is no integer")
                             : absl::StrCat(shown, " is on no step: ", number_text(low), " + n * ", number_text(step)));
  }
}

void check_number(Draft& draft, int index, const v1::Variable& variable) {
  const bool ordered = check_bounds(draft, index, variable);
  if (variable.kind() == v1::VARIABLE_KIND_STEPPED) {
    if (ordered) check_step(draft, index, variable);
  } else if (variable.step() != 0.0) {
    draft.findings.add(field_of("variable", index, "step"), "only a stepped variable has a step",
                       {"add kind = \"stepped\", or leave the step out", ""});
  }
  if (ordered && variable.kind() == v1::VARIABLE_KIND_INTEGER) check_whole(draft, index, variable);
  if (ordered) check_scale(draft, index, variable);
  if (ordered) check_baseline(draft, index, variable);
  if (variable.choices_size() > 0) {
    draft.findings.add(field_of("variable", index, "choices"), "only a choice variable has choices",
                       {"add kind = \"choice\", or leave the choices out", ""});
  }
  check_input_unit(draft, field_of("variable", index, "unit"), variable.unit(), variable.name());
  const v1::Accepted* const accepted = draft.accepted(variable.name());
  if (accepted != nullptr && accepted->choices_size() > 0) {
    const std::vector<std::string> choices(accepted->choices().begin(), accepted->choices().end());
    draft.findings.add(
        field_of("variable", index, "kind"),
        absl::StrCat(quoted_code(draft), " takes a text for ", quoted(variable.name()), ": ", listed(choices)),
        {"make it kind = \"choice\"", ""});
  }
}

void check_one_choice(Draft& draft, int index, const v1::Variable& variable, const std::string& choice) {
  const std::string field = field_of("variable", index, "choices");
  if (choice.empty()) draft.findings.add(field, "a choice is empty");
  if (!short_enough(draft, field, choice, kMostChoiceLength)) return;
  const v1::Accepted* const accepted = draft.accepted(variable.name());
  if (accepted == nullptr || accepted->choices_size() == 0) return;
  const std::vector<std::string> texts(accepted->choices().begin(), accepted->choices().end());
  if (std::find(texts.begin(), texts.end(), choice) != texts.end()) return;
  draft.findings.add(field,
                     absl::StrCat(quoted_code(draft), " takes no ", quoted(choice), " for ", quoted(variable.name())),
                     {absl::StrCat("it takes ", listed(texts)), draft.findings.nearest_for(choice, texts)});
}

void check_choices(Draft& draft, int index, const v1::Variable& variable) {
  const std::string field = field_of("variable", index, "choices");
  const int count = variable.choices_size();
  if (count < 2 || count > kMostChoices) {
    draft.findings.add(
        field, absl::StrCat(count, count == 1 ? " choice" : " choices", "; from 2 to ", kMostChoices, " are wanted"));
    if (count > kMostChoices) return;
  }
  std::set<std::string> seen;
  for (const std::string& choice : variable.choices()) {
    if (!seen.insert(choice).second) draft.findings.add(field, absl::StrCat(quoted(choice), " is given twice"));
    check_one_choice(draft, index, variable, choice);
  }
  const v1::Accepted* const accepted = draft.accepted(variable.name());
  if (accepted != nullptr && accepted->choices_size() == 0) {
    draft.findings.add(field_of("variable", index, "kind"),
                       absl::StrCat(quoted_code(draft), " takes a number for ", quoted(variable.name()), ", no text"),
                       {"use kind = \"integer\" or \"stepped\"", ""});
  }
  if (variable.has_baseline_choice() && !seen.contains(variable.baseline_choice())) {
    const std::vector<std::string> choices(seen.begin(), seen.end());
    draft.findings.add(field_of("variable", index, "baseline"),
                       absl::StrCat(quoted(variable.baseline_choice()), " is none of its choices"),
                       {"", draft.findings.nearest_for(variable.baseline_choice(), choices)});
  }
}

// A choice has nothing that belongs to numbers.
void check_no_numbers(Draft& draft, int index, const v1::Variable& variable) {
  const auto refuse = [&](bool there, const std::string& key) {
    if (there) draft.findings.add(field_of("variable", index, key), absl::StrCat("a choice variable has no ", key));
  };
  refuse(variable.low() != 0.0, "low");
  refuse(variable.high() != 0.0, "high");
  refuse(variable.step() != 0.0, "step");
  refuse(variable.scale() == v1::SCALE_LOG, "scale");
  refuse(!variable.unit().empty(), "unit");
  if (variable.has_baseline()) {
    draft.findings.add(field_of("variable", index, "baseline"),
                       "a number; the baseline of a choice is one of its texts");
  }
}

void check_variable(Draft& draft, int index) {
  const v1::Variable& variable = draft.given.variables(index);
  const bool choice = variable.kind() == v1::VARIABLE_KIND_CHOICE;
  const NameUse use{choice ? NameUse::Kind::kChoice : NameUse::Kind::kVariable, "", variable.unit()};
  check_name(draft, "variable", index, variable.name(), use);
  if (!v1::VariableKind_IsValid(variable.kind())) {
    draft.findings.add(field_of("variable", index, "kind"), "no such kind");
  } else if (choice) {
    check_choices(draft, index, variable);
    check_no_numbers(draft, index, variable);
  } else {
    check_number(draft, index, variable);
  }
  v1::Variable& effective = *draft.effective.mutable_variables(index);
  if (effective.kind() == v1::VARIABLE_KIND_UNSPECIFIED) effective.set_kind(v1::VARIABLE_KIND_REAL);
  if (effective.scale() == v1::SCALE_UNSPECIFIED) effective.set_scale(v1::SCALE_LINEAR);
}

// --- conditions ---

void check_weights(Draft& draft, int index, const v1::Condition& condition) {
  const std::string field = field_of("condition", index, "weights");
  if (condition.weights_size() == 0) return;
  if (condition.weights_size() != condition.values_size()) {
    draft.findings.add(field, absl::StrCat(condition.weights_size(), " weights for ", condition.values_size(),
                                           " values; one a value is wanted"));
    return;
  }
  double sum = 0.0;
  for (const double weight : condition.weights()) {
    if (!finite(draft, field, weight)) return;
    if (weight < 0.0) {
      draft.findings.add(field, absl::StrCat("weight ", number_text(weight), " is below 0"));
      return;
    }
    sum += weight;
  }
  if (!(sum > 0.0)) draft.findings.add(field, "the weights add up to 0; one has to be above");
  finite(draft, field, sum);
}

void check_condition(Draft& draft, int index) {
  const v1::Condition& condition = draft.given.conditions(index);
  check_name(draft, "condition", index, condition.name(), {NameUse::Kind::kCondition, "", condition.unit()});
  const std::string field = field_of("condition", index, "values");
  if (condition.values_size() == 0) draft.findings.add(field, "the condition has no values");
  for (const double value : condition.values()) {
    if (!finite(draft, field, value)) break;
  }
  check_weights(draft, index, condition);
  check_input_unit(draft, field_of("condition", index, "unit"), condition.unit(), condition.name());
  const v1::Accepted* const accepted = draft.accepted(condition.name());
  if (accepted != nullptr && accepted->choices_size() > 0) {
    draft.findings.add(
        field_of("condition", index, "name"),
        absl::StrCat(quoted_code(draft), " takes a text for ", quoted(condition.name()), "; a condition has numbers"));
  }
  const bool before = draft.cells > kMostCells;
  draft.cells = std::min<std::int64_t>(draft.cells * std::max(1, condition.values_size()), kMostCells + 1);
  if (!before && draft.cells > kMostCells) {
    draft.findings.add(field, absl::StrCat("more than ", kMostCells, " combinations of conditions"));
  }
  v1::Condition& effective = *draft.effective.mutable_conditions(index);
  if (effective.weights_size() > 0) return;
  for (int i = 0; i < effective.values_size(); ++i) effective.add_weights(1.0 / effective.values_size());
}

}  // namespace

void check_variables(Draft& draft) {
  const int count = draft.given.variables_size();
  if (count == 0) draft.findings.add("variable", "the study has no variable; nothing can be searched");
  if (count > kMostVariables)
    draft.findings.add("variable", absl::StrCat(count, " variables; at most ", kMostVariables));
  for (int i = 0; i < std::min(count, kMostVariables); ++i) check_variable(draft, i);
}

void check_conditions(Draft& draft) {
  const int count = draft.given.conditions_size();
  if (count > kMostConditions) {
    draft.findings.add("condition", absl::StrCat(count, " conditions; at most ", kMostConditions));
  }
  for (int i = 0; i < std::min(count, kMostConditions); ++i) check_condition(draft, i);
  const std::int64_t runs = draft.cells * draft.effective.replicates();
  if (draft.cells <= kMostCells && runs > kMostRunsPerCandidate) {
    draft.findings.add("study.replicates",
                       absl::StrCat(draft.cells, " combinations of conditions x ", draft.effective.replicates(),
                                    " replicates are ", runs, " runs a candidate; at most ", kMostRunsPerCandidate));
  }
}

void check_coverage(Draft& draft) {
  if (draft.code == nullptr) return;
  std::vector<std::string> missing;
  for (const v1::Accepted& accepts : draft.code->accepts()) {
    if (!draft.inputs.contains(accepts.name())) missing.push_back(accepts.name());
  }
  if (missing.empty()) return;
  draft.findings.add("study.code",
                     absl::StrCat(quoted_code(draft), " needs ", listed(missing), ", which the study does not give"),
                     {"add a [[variable]] or a [[condition]] for each", ""});
}

}  // namespace drover::study
