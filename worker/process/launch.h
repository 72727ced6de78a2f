// Starts an attempt under a runner of its own, which outlives this process.
#pragma once

#include <sys/types.h>

#include <cstdint>
#include <string>
#include <vector>

#include "absl/status/statusor.h"
#include "absl/time/time.h"

namespace drover::process {

struct Launch {
  std::string runner;  // program
  std::string folder;  // of the attempt: records and outputs of the run
  std::string work;    // where the simulation runs
  std::int64_t run = 0, fence = 0;
  std::vector<std::string> command;      // command[0] is an absolute path
  std::vector<std::string> environment;  // "NAME=value", all of it
  absl::Duration time_limit, grace;      // above 0
  std::int64_t output_cap_bytes = 64 << 20;  // of stdout and of stderr: beyond, head and tail are kept
};

// Never forks: posix_spawn with every signal at its default. The pid is that of the runner, our child; it has written
// nothing yet. UNAVAILABLE: no process could be made.
absl::StatusOr<pid_t> launch(const Launch& what);

}  // namespace drover::process
