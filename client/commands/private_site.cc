#include "commands/private_site.h"

#include <unistd.h>

#include <filesystem>
#include <system_error>

#include "absl/strings/str_cat.h"
#include "commands/predecessors.h"
#include "link/identity.h"
#include "status/try.h"

namespace drover::commands {
namespace {

constexpr absl::Duration kPredecessors = absl::Seconds(60);  // to end after their owner was killed
constexpr absl::Duration kPatience = absl::Minutes(2);       // with daemons that are tended meanwhile

ProgramCall coordinator_call(const SiteOptions& options, const DataFolder& folder, const std::string& address) {
  return {.program = options.programs + "/drover-coordinator",
          .arguments = {"serve", "--data", folder.file("coordinator"), "--listen", address, "--end-with-pid",
                        absl::StrCat(::getpid())},
          .log = folder.file("coordinator.log")};
}

ProgramCall worker_call(const SiteOptions& options, const DataFolder& folder, const std::string& address) {
  return {.program = options.programs + "/drover-worker",
          .arguments = {"serve", "--coordinator", address, "--codes", options.codes, "--slots",
                        absl::StrCat(options.slots), "--spool", folder.file("worker"), "--scratch",
                        folder.file("scratch"), "--end-with-pid", absl::StrCat(::getpid())},
          .log = folder.file("worker.log")};
}

absl::Status check_there(const SiteOptions& options) {
  std::error_code error;
  for (const char* program : {"drover-coordinator", "drover-worker"}) {
    const std::string path = absl::StrCat(options.programs, "/", program);
    if (::access(path.c_str(), X_OK) == 0) continue;
    return absl::FailedPreconditionError(
        absl::StrCat(path, " is missing; drover needs it beside itself to work alone"));
  }
  if (std::filesystem::is_directory(options.codes, error)) return absl::OkStatus();
  return absl::NotFoundError(
      absl::StrCat("there is no folder ", options.codes, " with code definitions; name it with --codes DIR"));
}

}  // namespace

PrivateSite::PrivateSite(const SiteOptions& options, const DataFolder& folder, const link::Clock& clock,
                         const Interruption& interruption, Output& output)
    : address_(folder.socket_address()),
      record_(folder.file("daemons")),
      coordinator_daemon_("the coordinator", coordinator_call(options, folder, address_), link::random_number()),
      worker_daemon_("the worker", worker_call(options, folder, address_), link::random_number()),
      clock_(clock),
      interruption_(interruption),
      tell_([&output](const std::string& text) { output.say(text); }) {}

absl::StatusOr<std::unique_ptr<PrivateSite>> PrivateSite::start(const SiteOptions& options, const DataFolder& folder,
                                                                const link::Clock& clock,
                                                                const Interruption& interruption, Output& output) {
  DROVER_TRY(check_there(options));
  SiteOptions whole = options;
  std::error_code error;
  whole.codes = std::filesystem::absolute(options.codes, error).string();
  std::unique_ptr<PrivateSite> site(new PrivateSite(whole, folder, clock, interruption, output));
  DROVER_ASSIGN(site->coordinator_, Coordinator::at(site->address_, clock, interruption, kPatience,
                                                    [raw = site.get()] { return raw->tend(); }));
  if (!recorded_daemons(site->record_).empty()) {
    output.say("an earlier drover was killed here; waiting for its daemons to end");
    await_predecessors(site->record_, clock, interruption, kPredecessors);
  }
  DROVER_TRY(site->tend());
  return site;
}

absl::Status PrivateSite::tend() {
  for (Daemon* daemon : {&coordinator_daemon_, &worker_daemon_}) {
    const absl::Status status = daemon->tend(clock_.steady());
    const std::string news = daemon->take_news();
    DROVER_TRY(status);
    if (!news.empty()) tell_(news);
  }
  const std::vector<pid_t> daemons = {coordinator_daemon_.pid(), worker_daemon_.pid()};
  if (daemons == recorded_) return absl::OkStatus();
  recorded_ = daemons;
  return record_daemons(record_, daemons);
}

absl::Status PrivateSite::wait_for_worker() {
  const absl::Duration limit = clock_.steady() + kPatience;
  while (true) {
    DROVER_ASSIGN(const std::vector<v1::Worker> workers, coordinator_->workers());
    for (const v1::Worker& worker : workers) {
      if (!worker.silent()) return absl::OkStatus();
    }
    if (clock_.steady() > limit) return absl::AbortedError("the worker does not enrol; see its log");
    DROVER_TRY(tend());
    if (interruption_.wait(absl::Milliseconds(100))) return absl::CancelledError("interrupted");
  }
}

void PrivateSite::end() {
  worker_daemon_.end(clock_);
  coordinator_daemon_.end(clock_);
}

}  // namespace drover::commands
