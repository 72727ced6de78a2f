// What an attempt's folder holds, and what its runner wrote there.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "process/identity.h"

namespace drover::process {

// Names of the files. order, report and receipt are the session's; the others the runner's.
inline constexpr char kOrderFile[] = "order", kReportFile[] = "report", kReceiptFile[] = "receipt",
                      kBegunFile[] = "begun", kEndedFile[] = "ended", kStopFile[] = "stop", kWatchFile[] = "watch",
                      kAliveFile[] = "alive", kStdoutFile[] = "stdout", kStderrFile[] = "stderr",
                      kRunnerLogFile[] = "runner.log";

// Written before the simulation's first instruction.
struct Begun {
  std::string boot_id;
  std::int64_t run = 0, fence = 0;
  ProcessIdentity runner, child;
  absl::Time time;  // wall clock, for people and to tell old result files
};

// Written after the last of its processes has gone.
struct Ended {
  enum class Cause { kExited, kLimit, kStopped, kLaunchFailed };
  Cause cause = Cause::kExited;
  std::optional<int> exit_code, signal;  // of the main process; neither: it was never started
  int launch_errno = 0;                  // kLaunchFailed
  bool killed_by_us = false;             // the runner sent it SIGKILL
  bool unkillable = false;               // something of it still runs
  absl::Duration wall, user_cpu, system_cpu;
  std::int64_t peak_memory_bytes = 0;
};

// INVALID_ARGUMENT: not whole, or of a later format.
absl::StatusOr<Begun> parse_begun(std::string_view text);
absl::StatusOr<Ended> parse_ended(std::string_view text);

}  // namespace drover::process
