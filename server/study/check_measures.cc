// [[derived]], [[objective]] and [[constraint]]: what is made of the code's answers.
#include <algorithm>
#include <cmath>

#include "absl/strings/str_cat.h"
#include "study/findings.h"
#include "study/formula.h"
#include "study/limits.h"
#include "study/names.h"
#include "study/scoring.h"
#include "study/wording.h"

namespace drover::study {
namespace {

// --- derived ---

// What formula `index` may use. Choices are no numbers and are left out.
std::vector<std::string> formula_names(const Draft& draft) {
  std::vector<std::string> names;
  for (const auto& [name, use] : draft.inputs) {
    if (use.kind != NameUse::Kind::kChoice) names.push_back(name);
  }
  for (const auto& [name, use] : draft.measures) names.push_back(name);
  return names;
}

bool is_later_derived(const Draft& draft, int index, const std::string& name) {
  const auto& derived = draft.given.derived();
  return std::any_of(derived.begin() + index + 1, derived.end(),
                     [&](const auto& other) { return other.name() == name; });
}

void formula_problem(Draft& draft, int index, const absl::Status& status, std::span<const std::string> names) {
  const std::string field = field_of("derived", index, "formula");
  const std::string unknown = Formula::unknown_name(status);
  const auto input = draft.inputs.find(unknown);
  if (unknown.empty()) {
    draft.findings.add(field, std::string(status.message()));
  } else if (input != draft.inputs.end() && input->second.kind == NameUse::Kind::kChoice) {
    draft.findings.add(field, absl::StrCat(quoted(unknown), " is a choice; a formula can use numbers only"));
  } else if (unknown == draft.given.derived(index).name()) {
    draft.findings.add(field, absl::StrCat("the formula of ", quoted(unknown), " uses ", quoted(unknown), " itself"));
  } else if (is_later_derived(draft, index, unknown)) {
    draft.findings.add(field, absl::StrCat(quoted(unknown), " is derived further down"),
                       {absl::StrCat("move this [[derived]] below ", printable(unknown, 100)), ""});
  } else {
    draft.findings.add(field, absl::StrCat("the formula uses ", quoted(unknown), ", which is not known"),
                       {absl::StrCat("known are ", listed(names)), draft.findings.nearest_for(unknown, names)});
  }
}

void check_formula(Draft& draft, int index) {
  const std::vector<std::string> names = formula_names(draft);
  const absl::StatusOr<Formula> formula = Formula::compile(draft.given.derived(index).formula(), names);
  if (!formula.ok()) {
    // Without the code nobody knows its outputs.
    const bool unjudged = draft.code == nullptr && !Formula::unknown_name(formula.status()).empty();
    if (!unjudged) formula_problem(draft, index, formula.status(), names);
    return;
  }
  for (const std::string& name : formula->names_used()) {
    if (!draft.inputs.contains(name) || !draft.measures.contains(name)) continue;
    draft.findings.add(
        field_of("derived", index, "formula"),
        absl::StrCat(quoted(name), " is both an input and an output of the code; a formula cannot tell"));
  }
}

void check_one_derived(Draft& draft, int index) {
  const v1::Derived& derived = draft.given.derived(index);
  const std::string field = field_of("derived", index, "name");
  const std::string& name = derived.name();
  short_enough(draft, field_of("derived", index, "unit"), derived.unit(), kMostUnitLength);
  check_formula(draft, index);
  if (name.empty()) {
    draft.findings.add(field, "the derived number has no name");
    return;
  }
  if (!short_enough(draft, field, name, kMostNameLength)) return;
  if (!is_identifier(name) || name == "_pi" || name == "_e") {
    draft.findings.add(field, absl::StrCat(quoted(name), " is no name for a derived number"),
                       {"letters, digits and '_', beginning with a letter", ""});
    return;
  }
  const auto input = draft.inputs.find(name);
  const auto measure = draft.measures.find(name);
  if (input != draft.inputs.end()) {
    draft.findings.add(field, absl::StrCat(quoted(name), " is taken: ", input->second.field, " has this name"));
  } else if (measure != draft.measures.end()) {
    const std::string& where = measure->second.field;
    draft.findings.add(field, absl::StrCat(quoted(name), " is taken: ", where.empty() ? "an output of the code" : where,
                                           " has this name"));
  } else {
    draft.measures[name] = {NameUse::Kind::kDerived, field_of("derived", index), derived.unit()};
  }
}

// --- objectives and constraints ---

// The output or derived number that `name` means; null, with a problem, when there is none.
const NameUse* find_measure(Draft& draft, const std::string& field, const std::string& name) {
  const auto found = draft.measures.find(name);
  if (found != draft.measures.end()) return &found->second;
  const std::vector<std::string> names = Draft::names(draft.measures);
  if (name.empty()) {
    draft.findings.add(field, "no output or derived number is named");
  } else if (draft.inputs.contains(name)) {
    draft.findings.add(field, absl::StrCat(quoted(name), " is an input, no output or derived number"),
                       {"to use it all the same, derive a number from it", ""});
  } else if (draft.code != nullptr) {
    draft.findings.add(field, absl::StrCat("there is no output or derived number ", quoted(name)),
                       {absl::StrCat("there are ", listed(names)), draft.findings.nearest_for(name, names)});
  }
  return nullptr;
}

void check_measure_unit(Draft& draft, const std::string& field, const NameUse& use, const std::string& name,
                        const std::string& unit) {
  if (!short_enough(draft, field, unit, kMostUnitLength)) return;
  std::string whose = absl::StrCat("the unit of ", printable(name, 100));
  if (use.kind == NameUse::Kind::kOutput) absl::StrAppend(&whose, " in code ", printable(draft.code->name(), 100));
  check_unit(draft, field, unit, use.unit, whose);
}

void check_across(Draft& draft, int index, const v1::Objective& objective) {
  const std::string field = field_of("objective", index, "across");
  const std::string quantile = field_of("objective", index, "quantile");
  if (objective.across() == v1::ACROSS_EACH) {
    draft.findings.add(field, "across = \"each\" is not available yet",
                       {"use \"mean\", \"worst\" or \"quantile\"", ""});
  } else if (!v1::Across_IsValid(objective.across())) {
    draft.findings.add(field, "no such way across the conditions", {"use \"mean\", \"worst\" or \"quantile\"", ""});
  } else if (objective.across() == v1::ACROSS_QUANTILE) {
    if (!(objective.quantile() > 0.0 && objective.quantile() < 1.0)) {
      draft.findings.add(quantile,
                         absl::StrCat("quantile = ", number_text(objective.quantile()), " is not between 0 and 1"),
                         {"0.1 means: one tenth of the conditions, by weight, are as bad or worse", ""});
    }
  } else if (objective.quantile() != 0.0) {
    draft.findings.add(quantile, "a quantile is used with across = \"quantile\" only");
  }
}

void check_objective(Draft& draft, int index) {
  const v1::Objective& objective = draft.given.objectives(index);
  const bool largest = objective.sense() == v1::SENSE_MAXIMISE;
  const std::string field = field_of("objective", index, largest ? "maximise" : "minimise");
  if (!v1::Sense_IsValid(objective.sense())) draft.findings.add(field, "no such sense");
  const NameUse* const use = find_measure(draft, field, objective.name());
  if (use != nullptr) {
    check_measure_unit(draft, field_of("objective", index, "unit"), *use, objective.name(), objective.unit());
  }
  check_across(draft, index, objective);
  v1::Objective& effective = *draft.effective.mutable_objectives(index);
  if (effective.sense() == v1::SENSE_UNSPECIFIED) effective.set_sense(v1::SENSE_MINIMISE);
  if (effective.across() == v1::ACROSS_UNSPECIFIED) effective.set_across(v1::ACROSS_MEAN);
}

// Both limits, their allowance and what violations are divided by.
void check_limits(Draft& draft, int index, const v1::Constraint& constraint) {
  const auto field = [index](std::string_view key) { return field_of("constraint", index, key); };
  if (!constraint.has_at_least() && !constraint.has_at_most()) {
    draft.findings.add(field("output"), "the constraint has no limit", {"add at_most, at_least or both", ""});
    return;
  }
  const bool low_good = !constraint.has_at_least() || finite(draft, field("at_least"), constraint.at_least());
  const bool high_good = !constraint.has_at_most() || finite(draft, field("at_most"), constraint.at_most());
  const double allowance = constraint.allowance();
  const bool share = allowance >= 0.0 && allowance < 1.0;
  if (!share) {
    draft.findings.add(field("allowance"), absl::StrCat("allowance = ", number_text(allowance),
                                                        " is not in [0, 1): a share of the limit is meant"));
  }
  if (!low_good || !high_good || !share) return;
  const Limits limits = tightened(constraint);
  if (constraint.has_at_least() && constraint.has_at_most() && constraint.at_least() > constraint.at_most()) {
    draft.findings.add(field("at_least"), absl::StrCat("at_least = ", number_text(constraint.at_least()),
                                                       " is above at_most = ", number_text(constraint.at_most())));
  } else if (limits.low > limits.high) {
    draft.findings.add(
        field("allowance"),
        absl::StrCat("allowance = ", number_text(allowance), " leaves nothing between the limits: at least ",
                     number_text(limits.low), ", at most ", number_text(limits.high)));
  }
  const bool zero = (constraint.has_at_least() && constraint.at_least() == 0.0) ||
                    (constraint.has_at_most() && constraint.at_most() == 0.0);
  if (zero && allowance > 0.0) {
    draft.findings.add(field("allowance"), "an allowance is a share of the limit, and the limit is 0",
                       {"leave the allowance out and move the limit itself", ""});
  }
}

void check_constraint_rules(Draft& draft, int index, const v1::Constraint& constraint) {
  const double scale = constraint.scale();
  if (!(scale >= 0.0) || !std::isfinite(scale)) {
    draft.findings.add(field_of("constraint", index, "scale"),
                       absl::StrCat("scale = ", number_text(scale), " is not above 0"));
  }
  const bool known = constraint.across() == v1::ACROSS_UNSPECIFIED || constraint.across() == v1::ACROSS_MEAN ||
                     constraint.across() == v1::ACROSS_WORST;
  if (!known) {
    draft.findings.add(field_of("constraint", index, "across"), "a constraint holds in the mean or in the worst case",
                       {"use \"mean\" or \"worst\"", ""});
  }
}

void check_constraint(Draft& draft, int index) {
  const v1::Constraint& constraint = draft.given.constraints(index);
  const NameUse* const use = find_measure(draft, field_of("constraint", index, "output"), constraint.name());
  if (use != nullptr) {
    check_measure_unit(draft, field_of("constraint", index, "unit"), *use, constraint.name(), constraint.unit());
  }
  check_limits(draft, index, constraint);
  check_constraint_rules(draft, index, constraint);
  v1::Constraint& effective = *draft.effective.mutable_constraints(index);
  if (effective.across() == v1::ACROSS_UNSPECIFIED) effective.set_across(v1::ACROSS_WORST);
  if (effective.scale() == 0.0) effective.set_scale(usual_scale(constraint));
}

}  // namespace

void check_derived(Draft& draft) {
  const int count = draft.given.derived_size();
  if (count > kMostDerived)
    draft.findings.add("derived", absl::StrCat(count, " derived numbers; at most ", kMostDerived));
  for (int i = 0; i < std::min(count, kMostDerived); ++i) check_one_derived(draft, i);
}

void check_objectives(Draft& draft) {
  const int count = draft.given.objectives_size();
  if (count == 0) {
    draft.findings.add("objective", "the study has no objective", {"add [[objective]] with minimise or maximise", ""});
  }
  if (count > 1) {
    const bool largest = draft.given.objectives(1).sense() == v1::SENSE_MAXIMISE;
    draft.findings.add(field_of("objective", 1, largest ? "maximise" : "minimise"),
                       absl::StrCat(count, " objectives; one only, for several are not available yet"),
                       {"make constraints of the others, or one [[derived]] number of them all", ""});
  }
  for (int i = 0; i < std::min(count, kMostObjectives); ++i) check_objective(draft, i);
}

void check_constraints(Draft& draft) {
  const int count = draft.given.constraints_size();
  if (count > kMostConstraints) {
    draft.findings.add("constraint", absl::StrCat(count, " constraints; at most ", kMostConstraints));
  }
  for (int i = 0; i < std::min(count, kMostConstraints); ++i) check_constraint(draft, i);
}

}  // namespace drover::study
