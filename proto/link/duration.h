// Spans of time: as people write them, and as messages carry them.
#pragma once

#include <string>
#include <string_view>

#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "google/protobuf/duration.pb.h"

namespace drover::link {

// "90s", "2h", "1h30m", "1.5d", "250ms": one or more numbers, each with a unit (ms, s, m, h, d). INVALID_ARGUMENT else,
// and for a negative or endless one.
absl::StatusOr<absl::Duration> parse_duration(std::string_view text);

google::protobuf::Duration to_proto(absl::Duration span);  // endless ones are cut to 10,000 years
absl::Duration from_proto(const google::protobuf::Duration& span);

// For people, two units at most: "2 h 5 min", "3.2 s", "41 ms", "6 d 4 h".
std::string human(absl::Duration span);

}  // namespace drover::link
