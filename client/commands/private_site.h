// A coordinator and a worker for one user on one machine: the same programs, started and kept running by this one.
#pragma once

#include <sys/types.h>

#include <functional>
#include <memory>
#include <string>
#include <utility>
#include <vector>

#include "absl/status/statusor.h"
#include "commands/coordinator.h"
#include "commands/daemon.h"
#include "commands/data_folder.h"
#include "commands/interruption.h"
#include "commands/output.h"
#include "link/clock.h"

namespace drover::commands {

struct SiteOptions {
  std::string programs;  // folder of drover-coordinator and drover-worker
  std::string codes;     // folder of code definitions
  int slots = 1;
};

// Both daemons end by themselves when this process does (--end-with-pid). Not thread-safe; the references must outlive
// it.
class PrivateSite {
 public:
  // NOT_FOUND when a program or the folder of codes is missing. Starts both daemons; they may need a moment.
  static absl::StatusOr<std::unique_ptr<PrivateSite>> start(const SiteOptions& options, const DataFolder& folder,
                                                            const link::Clock& clock, const Interruption& interruption,
                                                            Output& output);

  // Keeps both daemons running, and tells when one had to be started again. ABORTED when one will not run.
  absl::Status tend();

  // Whom tend() tells; at first the output's messages.
  using Tell = std::function<void(const std::string&)>;
  void set_tell(Tell tell) { tell_ = std::move(tell); }

  // The calls of this one wait for the daemons, and tend them meanwhile.
  Coordinator& coordinator() { return *coordinator_; }
  const std::string& address() const { return address_; }

  // Waits until a worker has enrolled with its codes.
  absl::Status wait_for_worker();

  // The worker first, so that it can hand in what it has.
  void end();

 private:
  PrivateSite(const SiteOptions& options, const DataFolder& folder, const link::Clock& clock,
              const Interruption& interruption, Output& output);

  std::string address_;
  std::string record_;           // file of the daemons' process ids, for a successor
  std::vector<pid_t> recorded_;  // what it holds
  Daemon coordinator_daemon_, worker_daemon_;
  const link::Clock& clock_;
  const Interruption& interruption_;
  Tell tell_;
  std::unique_ptr<Coordinator> coordinator_;
};

}  // namespace drover::commands
