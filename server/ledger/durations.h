// Protobuf durations to Abseil's and back.
#pragma once

#include "absl/time/time.h"
#include "google/protobuf/duration.pb.h"

namespace drover::ledger {

inline absl::Duration to_duration(const google::protobuf::Duration& span) {
  return absl::Seconds(span.seconds()) + absl::Nanoseconds(span.nanos());
}

inline void set(google::protobuf::Duration& span, absl::Duration value) {
  span.set_seconds(absl::IDivDuration(value, absl::Seconds(1), &value));
  span.set_nanos(static_cast<std::int32_t>(absl::IDivDuration(value, absl::Nanoseconds(1), &value)));
}

}  // namespace drover::ledger
