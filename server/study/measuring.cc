#include "study/measuring.h"

#include <algorithm>
#include <cmath>
#include <utility>

#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "study/wording.h"

namespace drover::study {

absl::StatusOr<Measuring> Measuring::make(const v1::StudySpec& spec, const v1::CodeDefinition& code) {
  Measuring made;
  std::vector<std::string> known;
  for (const v1::Variable& variable : spec.variables()) known.push_back(variable.name());
  for (const v1::Condition& condition : spec.conditions()) known.push_back(condition.name());
  for (const v1::CodeOutput& output : code.outputs()) {
    known.push_back(output.name());
    made.names_.push_back(output.name());
    made.units_.push_back(output.unit());
  }
  made.outputs_ = made.names_.size();
  for (const v1::Derived& derived : spec.derived()) {
    DROVER_ASSIGN(Formula formula, Formula::compile(derived.formula(), known));
    made.formulas_.push_back(std::move(formula));
    known.push_back(derived.name());
    made.names_.push_back(derived.name());
    made.units_.push_back(derived.unit());
  }
  for (const v1::Objective& objective : spec.objectives()) {
    DROVER_ASSIGN(Measure measure, made.measure(objective.name(), objective.unit()));
    made.objectives_.push_back(std::move(measure));
  }
  for (const v1::Constraint& constraint : spec.constraints()) {
    DROVER_ASSIGN(Measure measure, made.measure(constraint.name(), constraint.unit()));
    made.constraints_.push_back(std::move(measure));
  }
  return made;
}

absl::StatusOr<Measure> Measuring::measure(const std::string& name, const std::string& unit) const {
  const auto at = std::find(names_.begin(), names_.end(), name);
  if (at == names_.end())
    return absl::InvalidArgumentError(absl::StrCat(quoted(name), " is no output or derived number"));
  const auto index = static_cast<std::size_t>(at - names_.begin());
  Measure made{.index = index, .unit = unit.empty() ? units_[index] : unit};
  if (unit.empty()) return made;
  DROVER_ASSIGN(made.conversion, Units::shared().conversion(units_[index], unit));
  return made;
}

absl::StatusOr<std::vector<double>> Measuring::numbers(std::span<const double> values,
                                                       std::span<const double> conditions,
                                                       const v1::AttemptReport& report) const {
  std::vector<double> known(values.begin(), values.end());
  known.insert(known.end(), conditions.begin(), conditions.end());
  const auto first = static_cast<std::ptrdiff_t>(known.size());
  for (std::size_t i = 0; i < outputs_; ++i) {
    const auto at = std::find_if(report.outputs().begin(), report.outputs().end(),
                                 [&](const v1::OutputValue& output) { return output.name() == names_[i]; });
    if (at == report.outputs().end()) {
      return absl::NotFoundError(absl::StrCat("output ", quoted(names_[i]), " was not reported"));
    }
    if (!std::isfinite(at->value())) {
      return absl::OutOfRangeError(absl::StrCat("output ", quoted(names_[i]), " is ", number_text(at->value())));
    }
    known.push_back(at->value());
  }
  for (std::size_t i = 0; i < formulas_.size(); ++i) {
    const absl::StatusOr<double> value = formulas_[i].evaluate(known);
    if (!value.ok()) {
      return absl::OutOfRangeError(
          absl::StrCat("derived number ", quoted(names_[outputs_ + i]), ": ", value.status().message()));
    }
    known.push_back(*value);
  }
  return std::vector<double>(known.begin() + first, known.end());
}

}  // namespace drover::study
