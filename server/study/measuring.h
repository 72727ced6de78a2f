// What one run of a study gives: outputs, derived numbers, and from them objectives and constraints. Internal to this
// folder.
#pragma once

#include <optional>
#include <span>
#include <string>
#include <vector>

#include "absl/status/statusor.h"
#include "drover/v1/attempt.pb.h"
#include "drover/v1/code.pb.h"
#include "drover/v1/study.pb.h"
#include "study/formula.h"
#include "study/units.h"

namespace drover::study {

// An output or derived number that an objective or a constraint looks at.
struct Measure {
  std::size_t index = 0;  // among outputs, then derived numbers
  std::string unit;       // that it is shown in
  Conversion conversion;  // from the number's own unit
  double of(std::span<const double> numbers) const { return conversion.apply(numbers[index]); }
};

// Immutable; safe from several threads.
class Measuring {
 public:
  static absl::StatusOr<Measuring> make(const v1::StudySpec& spec, const v1::CodeDefinition& code);

  // One number an output of the code and a derived number, in their order. `values` are the variables', `conditions`
  // the cell's. NOT_FOUND: an output is missing; OUT_OF_RANGE: a number is not finite.
  absl::StatusOr<std::vector<double>> numbers(std::span<const double> values, std::span<const double> conditions,
                                              const v1::AttemptReport& report) const;

  const std::vector<Measure>& objectives() const { return objectives_; }
  const std::vector<Measure>& constraints() const { return constraints_; }
  const std::vector<std::string>& names() const { return names_; }  // of the numbers
  const std::vector<std::string>& units() const { return units_; }

 private:
  absl::StatusOr<Measure> measure(const std::string& name, const std::string& unit) const;

  std::vector<std::string> names_, units_;
  std::size_t outputs_ = 0;
  std::vector<Formula> formulas_;
  std::vector<Measure> objectives_, constraints_;
};

}  // namespace drover::study
