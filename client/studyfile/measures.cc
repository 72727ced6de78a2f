// [[derived]], [[objective]] and [[constraint]]: what is made of the outputs.
#include "absl/strings/str_cat.h"
#include "studyfile/parts.h"

namespace drover::studyfile {

void read_derived(TableReader& table, v1::Derived& derived) {
  if (const auto name = table.text("name")) {
    derived.set_name(*name);
    table.set_title(absl::StrCat("derived ", quoted(*name)));
  }
  table.require("name", "name = \"...\"");
  if (const auto formula = table.text("formula")) derived.set_formula(*formula);
  table.require("formula", "formula = \"...\", of outputs, variables, conditions and earlier derived numbers");
  if (const auto unit = table.text("unit")) derived.set_unit(*unit);
  table.finish();
}

namespace {

void read_sense(TableReader& table, v1::Objective& objective) {
  const auto least = table.text("minimise");
  const auto most = table.text("maximise");
  if (table.has("minimise") && table.has("maximise")) {
    table.complain("maximise", "an objective has minimise or maximise, not both", "write two [[objective]] tables");
  } else if (!table.has("minimise") && !table.has("maximise")) {
    table.complain("minimise", absl::StrCat(table.title(), " does not say what is wanted"),
                   "add minimise = \"...\" or maximise = \"...\", with the name of an output or a derived number");
  }
  objective.set_sense(most.has_value() ? v1::SENSE_MAXIMISE : v1::SENSE_MINIMISE);
  objective.set_name(most.value_or(least.value_or("")));
  if (!objective.name().empty()) table.set_title(absl::StrCat("objective ", quoted(objective.name())));
}

void read_quantile(TableReader& table, v1::Objective& objective) {
  const auto quantile = table.number("quantile");
  if (objective.across() != v1::ACROSS_QUANTILE) {
    table.refuse("quantile", "a quantile goes with across = \"quantile\" only",
                 "add across = \"quantile\", or leave quantile out");
    return;
  }
  table.require("quantile", "quantile = 0.1: one tenth of the conditions, by weight, may be as bad or worse");
  if (!quantile.has_value()) return;
  objective.set_quantile(*quantile);
  if (!(*quantile > 0 && *quantile < 1)) {
    table.complain("quantile", absl::StrCat("quantile = ", *quantile, " is not between 0 and 1"),
                   "write a share above 0 and below 1");
  }
}

void read_limits(TableReader& table, v1::Constraint& constraint) {
  if (const auto most = table.number("at_most")) constraint.set_at_most(*most);
  if (const auto least = table.number("at_least")) constraint.set_at_least(*least);
  if (!table.has("at_most") && !table.has("at_least")) {
    table.complain("at_most", absl::StrCat(table.title(), " has no limit"),
                   "add at_most = NUMBER, at_least = NUMBER or both");
  }
  if (const auto allowance = table.number("allowance")) {
    constraint.set_allowance(*allowance);
    if (!(*allowance >= 0 && *allowance < 1)) {
      table.complain("allowance", absl::StrCat("allowance = ", *allowance, " is not in [0, 1)"),
                     "write the share of the limit that is kept back, such as 0.05");
    }
  }
  const auto scale = table.number("scale");
  if (!scale.has_value()) return;
  constraint.set_scale(*scale);
  if (!(*scale > 0)) {
    table.complain("scale", absl::StrCat("scale = ", *scale, " is not above 0"),
                   "write a number above 0, or leave it out: the limit's size");
  }
}

}  // namespace

void read_objective(TableReader& table, v1::Objective& objective) {
  read_sense(table, objective);
  if (const auto across = table.word("across", {{"mean", v1::ACROSS_MEAN},
                                                {"worst", v1::ACROSS_WORST},
                                                {"quantile", v1::ACROSS_QUANTILE},
                                                {"each", v1::ACROSS_EACH}})) {
    objective.set_across(static_cast<v1::Across>(*across));
  }
  read_quantile(table, objective);
  if (const auto unit = table.text("unit")) objective.set_unit(*unit);
  table.finish();
}

void read_constraint(TableReader& table, v1::Constraint& constraint) {
  if (const auto output = table.text("output")) {
    constraint.set_name(*output);
    table.set_title(absl::StrCat("constraint ", quoted(*output)));
  }
  table.require("output", "output = \"...\", with the name of an output or a derived number");
  if (const auto unit = table.text("unit")) constraint.set_unit(*unit);
  read_limits(table, constraint);
  if (const auto across = table.word("across", {{"mean", v1::ACROSS_MEAN}, {"worst", v1::ACROSS_WORST}})) {
    constraint.set_across(static_cast<v1::Across>(*across));
  }
  table.finish();
}

}  // namespace drover::studyfile
