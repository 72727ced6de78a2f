// How far a study is, in one line.
#pragma once

#include <cstdint>
#include <optional>
#include <string>

#include "absl/time/time.h"
#include "drover/v1/study.pb.h"

namespace drover::screen {

std::int64_t settled(const v1::RunCounts& runs);  // evaluated and failed
std::int64_t in_hand(const v1::RunCounts& runs);  // granted, begun or stopping: on a worker's slot
std::int64_t open(const v1::RunCounts& runs);     // neither settled nor withdrawn

// Until the budget is spent or the deadline is reached, whatever comes first, from the mean time of a run and the
// slots. Nothing when it cannot be said: no budget, no settled run, no slots, paused or over.
std::optional<absl::Duration> time_left(const v1::Study& study, absl::Time now);

// "runs 123/400  best 45.67 kEUR/a (feasible)  slots 3/4 busy  about 2 min left"
std::string progress_line(const v1::Study& study, absl::Time now);

}  // namespace drover::screen
