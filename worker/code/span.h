// Spans of time and sizes, as a definition writes them.
#pragma once

#include <cstdint>
#include <string_view>

#include "absl/status/statusor.h"
#include "absl/time/time.h"

namespace drover::code {

// "90s", "2h", "1h30m", "1.5d", "250ms". INVALID_ARGUMENT else.
absl::StatusOr<absl::Duration> parse_span(std::string_view text);
// "512MiB", "4GiB", "1.5TiB", "800MB", a number of bytes. INVALID_ARGUMENT else, and for 0.
absl::StatusOr<std::int64_t> parse_size(std::string_view text);

}  // namespace drover::code
