// Ends what a predecessor left running of an attempt.
#pragma once

#include <string>

#include "absl/status/status.h"
#include "absl/time/time.h"
#include "process/files.h"

namespace drover::process {

// Asks its runner to stop it. Where that has gone or cannot be told: ends the runner and sends SIGTERM, and after
// `grace` SIGKILL, to the main process and all of its session and descendants, each known by pid and start time, until
// none is left. Blocks for as long as that takes, at most twice the grace and twenty seconds more: UNAVAILABLE then. OK
// where nothing runs.
absl::Status end_leftovers(Files& files, const std::string& folder, const std::string& boot_id, absl::Duration grace);

}  // namespace drover::process
