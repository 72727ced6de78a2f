#include "serve_command.h"

#include <unistd.h>

#include <cstdlib>
#include <iostream>
#include <memory>
#include <utility>

#include "absl/strings/str_cat.h"
#include "code/catalogue.h"
#include "exit_code.h"
#include "link/address.h"
#include "link/clock.h"
#include "link/identity.h"
#include "link/stopping.h"
#include "link/text.h"
#include "places.h"
#include "process/files.h"
#include "session/coordinator.h"
#include "session/daemon.h"
#include "spdlog/spdlog.h"
#include "status/try.h"

namespace drover {
namespace {

int refuse(const absl::Status& status) {
  std::cerr << "drover-worker: " << link::printable(std::string(status.message()), true) << "\n";
  const bool input = absl::IsInvalidArgument(status) || absl::IsNotFound(status) ||
                     absl::IsFailedPrecondition(status) || absl::IsUnimplemented(status);
  return input ? kUsage : kFailed;
}

absl::StatusOr<std::string> runner_program(const std::string& asked) {
  if (asked.empty()) return sister_program("drover-runner");
  const std::string path = absolute_path(asked);
  if (access(path.c_str(), X_OK) == 0) return path;
  return absl::NotFoundError(absl::StrCat("--runner ", path, " is not there or cannot be run"));
}

absl::StatusOr<session::Options> session_options(const ServeOptions& asked) {
  session::Options made;
  made.machine = session::this_machine();
  made.worker = asked.name.empty() ? made.machine.host : asked.name;
  DROVER_TRY(check_worker_name(made.worker));
  made.version = DROVER_VERSION;
  made.slots = asked.slots;
  made.tags = asked.tags;
  made.spool = absolute_path(asked.spool);
  if (asked.spool.empty()) {
    DROVER_ASSIGN(made.spool, default_spool(made.worker));
  }
  made.scratch = asked.scratch.empty() ? made.spool + "/scratch" : absolute_path(asked.scratch);
  DROVER_ASSIGN(made.runner, runner_program(asked.runner));
  made.fresh_id = link::random_id;
  made.seed = link::random_number();
  return made;
}

absl::StatusOr<code::Catalogue> offered_codes(const std::string& folder) {
  DROVER_ASSIGN(code::Catalogue catalogue, code::read_catalogue(absolute_path(folder)));
  for (const std::string& problem : catalogue.problems) spdlog::error("a code is not offered: {}", problem);
  if (!catalogue.codes.empty()) return catalogue;
  return absl::InvalidArgumentError(
      absl::StrCat("no code in ", folder, " can be offered; `drover-worker codes --codes ", folder, "` shows why"));
}

// Until a signal comes, or the owner ends.
absl::Status work(session::Daemon& daemon, int owner) {
  DROVER_ASSIGN(const std::unique_ptr<link::StopWatch> watch,
                link::StopWatch::start(owner, [&daemon](link::StopCause cause, int count) {
                  if (count > 1) std::_Exit(kFailed);  // what runs and what waits is on the disk
                  spdlog::info("stopping: {}; again: at once",
                               cause == link::StopCause::kSignal ? "a signal came" : "its owner has ended");
                  daemon.stop();
                }));
  return daemon.run();
}

}  // namespace

int serve(const ServeOptions& asked) {
  absl::StatusOr<session::Options> options = session_options(asked);
  if (!options.ok()) return refuse(options.status());
  const absl::StatusOr<link::Address> address =
      link::Address::parse(asked.coordinator.empty() ? link::default_address() : asked.coordinator);
  if (!address.ok()) return refuse(address.status());
  const absl::StatusOr<std::unique_ptr<session::Coordinator>> coordinator = session::dial(*address);
  if (!coordinator.ok()) return refuse(coordinator.status());
  const absl::StatusOr<code::Catalogue> catalogue = offered_codes(asked.codes);
  if (!catalogue.ok()) return refuse(catalogue.status());
  const link::RealClock clock;
  process::RealFiles files;
  spdlog::info("starting worker={} slots={} codes={} coordinator={} spool={} scratch={}", options->worker,
               options->slots, catalogue->codes.size(), address->text(), options->spool, options->scratch);
  absl::StatusOr<std::unique_ptr<session::Daemon>> daemon =
      session::Daemon::open(*std::move(options), *catalogue, **coordinator, files, clock);
  if (!daemon.ok()) return refuse(daemon.status());
  const absl::Status status = work(**daemon, asked.owner);
  if (!status.ok()) return refuse(status);
  spdlog::info("stopped");
  return kDone;
}

}  // namespace drover
