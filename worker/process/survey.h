// What became of an attempt, by what its folder shows (reliability: the worker's disk is the truth about its
// processes).
#pragma once

#include <optional>
#include <string>

#include "absl/status/statusor.h"
#include "process/attempt_folder.h"
#include "process/files.h"

namespace drover::process {

enum class Found {
  kOrdered,    // granted, and no process was started
  kRunning,    // its runner watches it
  kUnwatched,  // its runner has gone, some of its processes run
  kEnded,      // the runner saw its end
  kReported,   // its report is written
  kDelivered,  // the coordinator has the report
  kRebooted,   // begun before the machine was started anew
  kUnknown,    // begun, nothing of it runs, and nobody saw its end
};

struct Survey {
  Found found = Found::kOrdered;
  std::optional<Begun> begun;
  std::optional<Ended> ended;
};

// Errors: a file that cannot be read, asked for its lock or parsed, with its name; never a guess.
absl::StatusOr<Survey> survey(const Files& files, const std::string& folder, const std::string& boot_id);

}  // namespace drover::process
