// How an attempt ended, as it is reported.
#pragma once

#include <optional>
#include <string>

#include "absl/time/time.h"
#include "code/definition.h"
#include "drover/v1/attempt.pb.h"

namespace drover::code {

// What the runner's records say.
struct HowItEnded {
  bool seen = true;             // false: nobody saw the end
  std::string launch_failure;   // in words; empty: it was started
  bool limit = false, stopped = false;
  std::optional<int> exit_code, signal;
  bool killed_by_us = false;    // SIGKILL came from its runner
  bool unkillable = false;
  absl::Duration wall, user_cpu, system_cpu;
  std::int64_t peak_memory_bytes = 0;
  absl::Time begun;
};

// Judged in this order: never seen to end (LOST, EXIT_UNKNOWN), not started (LOST, SITE), stopped (STOPPED), time limit
// (FAILED, LIMIT), killed by SIGKILL from elsewhere (FAILED, MEMORY when it had come near to what the definition or the
// machine has; else LOST, KILLED_FROM_OUTSIDE), another signal (FAILED, SIGNAL), an unhealthy exit code or an `absent`
// text (FAILED, CODE), outputs that cannot be read (FAILED, CODE). Else EVALUATED with the outputs in the definition's
// order. Run, fence and input digest are the caller's to fill in. Tails of stdout and stderr on FAILED and LOST.
v1::AttemptReport judge(const Definition& definition, const HowItEnded& how, const std::string& work,
                        const std::string& stdout_path, const std::string& stderr_path);

}  // namespace drover::code
