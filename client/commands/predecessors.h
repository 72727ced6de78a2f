// Daemons that an earlier solo, killed by force, left behind in a data folder: they end by themselves, but need a
// moment.
//
// Their process ids are kept in a file, each with the time the process started, so that a number that was given to
// another process meanwhile is not taken for them. No signal is ever sent to them.
#pragma once

#include <sys/types.h>

#include <string>
#include <vector>

#include "absl/status/status.h"
#include "absl/time/time.h"
#include "commands/interruption.h"
#include "link/clock.h"

namespace drover::commands {

// Replaces the file by these processes; ids of 0 and processes that are gone are left out.
absl::Status record_daemons(const std::string& file, const std::vector<pid_t>& daemons);

// Those of the file that still run.
std::vector<pid_t> recorded_daemons(const std::string& file);

// Waits until none of them runs, `limit` is over or an interruption happens.
void await_predecessors(const std::string& file, const link::Clock& clock, const Interruption& interruption,
                        absl::Duration limit);

}  // namespace drover::commands
