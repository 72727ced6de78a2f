// Doubles that have to come back bit for bit, as the bytes in which events and tables keep them.
#pragma once

#include <span>
#include <string>
#include <string_view>
#include <vector>

#include "absl/status/statusor.h"

namespace drover::study {

// Eight bytes a number, IEEE 754 binary64, little-endian on every machine. NaN and infinities pass unchanged.
std::string pack_doubles(std::span<const double> values);
std::string pack_double(double value);

// INVALID_ARGUMENT when the length is no multiple of eight.
absl::StatusOr<std::vector<double>> unpack_doubles(std::string_view bytes);
// INVALID_ARGUMENT when the length is not eight.
absl::StatusOr<double> unpack_double(std::string_view bytes);

}  // namespace drover::study
