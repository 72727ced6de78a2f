// A formula over named numbers: `0.11 * 8.76 * power - annual_cost`.
#pragma once

#include <memory>
#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "absl/status/statusor.h"

namespace drover::study {

// Compiled once, evaluated as often as wanted.
//
// Operators: + - * / ^ (to the right), < <= > >= == !=, && ||, a ? b : c, parentheses. Functions: abs sqrt exp ln log
// (both natural) log2 log10 sin cos tan asin acos atan atan2 sinh cosh tanh asinh acosh atanh sign rint min max sum
// avg. Constants: _pi _e. No assignment, no texts, one value. '.' is the decimal point in every locale.
//
// Threads: evaluate() may be called from several; a mutex in the object serialises them (the parser binds its
// variables by address). Movable, not copyable.
class Formula {
 public:
  // `known` names what may be used, in the order in which evaluate() takes the values; names that are no identifiers
  // cannot be used and are passed over. A name given twice means the later one.
  //
  // INVALID_ARGUMENT, in words and with the place (1-based character) where there is one: empty, longer than
  // kMostFormulaLength, nested deeper than kMostFormulaDepth, wrong syntax, an unknown name (with the nearest known
  // one).
  static absl::StatusOr<Formula> compile(std::string_view text, std::span<const std::string> known);

  Formula(Formula&&) noexcept;
  Formula& operator=(Formula&&) noexcept;
  ~Formula();

  // Those of `known` that the formula uses, sorted.
  const std::vector<std::string>& names_used() const;

  // INVALID_ARGUMENT when `values` has another size than `known`; OUT_OF_RANGE, in words, when the result is not
  // finite.
  absl::StatusOr<double> evaluate(std::span<const double> values) const;

  // The name that a failed compile() did not know; empty when that was not the trouble. For advice.
  static std::string unknown_name(const absl::Status& status);

 private:
  struct Parts;
  explicit Formula(std::unique_ptr<Parts> parts);
  std::unique_ptr<Parts> parts_;
};

}  // namespace drover::study
