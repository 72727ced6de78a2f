// [[variable]] and [[condition]].
#include "absl/strings/str_cat.h"
#include "studyfile/parts.h"

namespace drover::studyfile {
namespace {

// "variable "wall"" instead of "[[variable]]" once the name is known.
void name_it(TableReader& table, const std::string& word, const std::string& name) {
  table.set_title(absl::StrCat(word, " ", quoted(name)));
}

void read_choice(TableReader& table, v1::Variable& variable) {
  if (const auto choices = table.texts("choices")) variable.mutable_choices()->Assign(choices->begin(), choices->end());
  if (const auto baseline = table.text("baseline")) variable.set_baseline_choice(*baseline);
  table.require("choices", "choices = [\"...\", \"...\"]");
  for (const char* key : {"low", "high", "step", "scale", "unit"}) {
    table.refuse(key, absl::StrCat(table.title(), " is a choice, and has no ", key),
                 absl::StrCat("leave ", key, " out, or change its kind"));
  }
}

void read_step(TableReader& table, v1::Variable& variable) {
  const auto step = table.number("step");
  if (variable.kind() != v1::VARIABLE_KIND_STEPPED) {
    table.refuse("step", absl::StrCat(table.title(), " is not stepped, and has no step"),
                 "add kind = \"stepped\", or leave step out");
    return;
  }
  table.require("step", "step = 0.5");
  if (!step.has_value()) return;
  if (*step > 0) {
    variable.set_step(*step);
  } else {
    table.complain("step", absl::StrCat("step = ", *step, " is not above 0"), "write a number above 0");
  }
}

void read_number(TableReader& table, v1::Variable& variable) {
  if (const auto low = table.number("low")) variable.set_low(*low);
  if (const auto high = table.number("high")) variable.set_high(*high);
  if (const auto baseline = table.number("baseline")) variable.set_baseline(*baseline);
  if (const auto scale = table.word("scale", {{"linear", v1::SCALE_LINEAR}, {"log", v1::SCALE_LOG}})) {
    variable.set_scale(static_cast<v1::Scale>(*scale));
  }
  table.require("low", "low = NUMBER");
  table.require("high", "high = NUMBER");
  read_step(table, variable);
  table.refuse("choices", absl::StrCat(table.title(), " is no choice, and has no choices"),
               "add kind = \"choice\", or leave choices out");
}

}  // namespace

void read_variable(TableReader& table, v1::Variable& variable) {
  if (const auto name = table.text("name")) {
    variable.set_name(*name);
    name_it(table, "variable", *name);
  }
  table.require("name", "name = \"...\", as the code's definition accepts it");
  const auto kind = table.word("kind", {{"real", v1::VARIABLE_KIND_REAL},
                                        {"stepped", v1::VARIABLE_KIND_STEPPED},
                                        {"integer", v1::VARIABLE_KIND_INTEGER},
                                        {"choice", v1::VARIABLE_KIND_CHOICE}});
  const bool misspelt = table.has("kind") && !kind.has_value();
  table.know({"low", "high", "step", "scale", "choices", "unit", "baseline"});
  if (kind.has_value()) variable.set_kind(static_cast<v1::VariableKind>(*kind));
  if (misspelt) return table.finish();  // which keys belong here is not known
  if (variable.kind() == v1::VARIABLE_KIND_CHOICE) {
    read_choice(table, variable);
  } else {
    read_number(table, variable);
    if (const auto unit = table.text("unit")) variable.set_unit(*unit);
  }
  table.finish();
}

void read_condition(TableReader& table, v1::Condition& condition) {
  if (const auto name = table.text("name")) {
    condition.set_name(*name);
    name_it(table, "condition", *name);
  }
  table.require("name", "name = \"...\", as the code's definition accepts it");
  if (const auto unit = table.text("unit")) condition.set_unit(*unit);
  const auto values = table.numbers("values");
  const auto weights = table.numbers("weights");
  table.require("values", "values = [1.0, 2.0]");
  if (values.has_value()) condition.mutable_values()->Assign(values->begin(), values->end());
  if (weights.has_value()) {
    condition.mutable_weights()->Assign(weights->begin(), weights->end());
    if (weights->empty()) table.complain("weights", "weights is an empty list", "leave weights out: all alike");
  }
  if (values.has_value() && values->empty()) table.complain("values", "values is an empty list", "write at least one");
  table.finish();
}

}  // namespace drover::studyfile
