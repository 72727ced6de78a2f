// Reads outputs off result files, in bounded memory whatever their size.
#pragma once

#include <string>
#include <vector>

#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "code/definition.h"

namespace drover::code {

// One output from a file in `folder`. Errors in words: NOT_FOUND the file, the text, the line or the field is not
// there; FAILED_PRECONDITION the file is older than `begun`; INVALID_ARGUMENT no number stands there; OUT_OF_RANGE it
// is not finite.
absl::StatusOr<double> read_output(const OutputReader& output, const std::string& folder, absl::Time begun);

// The first of `texts` found in the file, with its line; found = false when none is or there is no such file.
struct FoundText {
  bool found = false;
  std::string text, line_text;
  std::int64_t line = 0;
};
FoundText find_text(const std::string& path, const std::vector<std::string>& texts);

}  // namespace drover::code
