// The times of the lease protocol. All of them can be set, so that tests need not wait.
#pragma once

#include "absl/status/status.h"
#include "absl/time/time.h"

namespace drover::dispatch {

// Spans on the steady clock. Defaults are those of a lab's fleet.
struct Times {
  absl::Duration renew_every = absl::Seconds(30);   // workers are asked to renew so often; a third of the lease or less
  absl::Duration lease = absl::Minutes(2);          // a silent session lapses after this; its runs are then parked
  absl::Duration grace = absl::Minutes(5);          // after a start of the coordinator, before anything may lapse
  absl::Duration patience = absl::Minutes(30);      // parked so long: a second attempt is allowed
  absl::Duration retry_first = absl::Seconds(5);    // wait of a run after its first loss by the site; doubles
  absl::Duration retry_most = absl::Minutes(10);    // ... up to this
  absl::Duration longest_poll = absl::Seconds(25);  // of a Lease that finds nothing
  absl::Duration late = absl::Seconds(1);           // the coordinator was away if its clock jumped by more

  // INVALID_ARGUMENT with the name of the setting that is not above zero, or a renewal rarer than half the lease.
  absl::Status validate() const;
};

}  // namespace drover::dispatch
