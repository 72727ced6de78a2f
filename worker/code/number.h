// Numbers as simulation codes write them.
#pragma once

#include <cstddef>
#include <string_view>

#include "absl/status/statusor.h"

namespace drover::code {

struct ReadNumber {
  double value = 0.0;      // may be infinite or NaN: the caller decides
  std::size_t length = 0;  // characters it took
};

// The number at the beginning of `text`: 1.5, +2, .5, 1.0E+03, Fortran's 1.0D+03 and 1.0-103, NaN, Infinity.
// Independent of the locale. INVALID_ARGUMENT: no number; OUT_OF_RANGE: asterisks, Fortran's sign of a field that was
// too narrow.
absl::StatusOr<ReadNumber> read_number(std::string_view text);

}  // namespace drover::code
