// What a worker daemon is told.
#pragma once

#include <cstddef>
#include <cstdint>
#include <functional>
#include <string>
#include <vector>

#include "absl/status/status.h"
#include "absl/time/time.h"
#include "drover/v1/code.pb.h"
#include "session/machine.h"
#include "session/spool.h"

namespace drover::session {

// All above zero. Tests make them short; nothing else needs to.
struct Times {
  absl::Duration poll = absl::Seconds(25);               // a Lease waits so long, unless the coordinator allows less
  absl::Duration retry_first = absl::Milliseconds(200);  // after a call that failed; doubles
  absl::Duration retry_most = absl::Seconds(20);
  absl::Duration disk_retry = absl::Seconds(5);    // until a report that could not be written is tried again
  absl::Duration stop_margin = absl::Seconds(15);  // beyond a code's grace, for simulations to end at a stop
  absl::Duration farewell = absl::Seconds(5);      // at a stop, for the last reports to be taken
  absl::Duration prune_every = absl::Hours(6);
};

struct Options {
  std::string worker;  // its name; not empty
  std::string version;
  int slots = 1;  // simulations at once; 1 or more
  std::vector<std::string> tags;
  std::string fleet_job;               // batch job that runs this worker; empty: none
  std::string spool, scratch, runner;  // absolute paths
  Machine machine;
  Times times;
  Retention retention;
  std::size_t most_waiting = 10'000;      // reports in the spool; with more no further run is taken
  std::function<std::string()> fresh_id;  // of requests; never twice the same
  std::uint64_t seed = 0;                 // of the jitter of waits

  // INVALID_ARGUMENT with the name of the setting that is wrong.
  absl::Status validate() const;
};

}  // namespace drover::session
