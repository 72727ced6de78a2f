// What earlier daemons left in the spool. Until running simulations can be taken over, they are ended.
#include <thread>
#include <utility>
#include <vector>

#include "absl/strings/str_cat.h"
#include "process/attempt_folder.h"
#include "process/leftovers.h"
#include "session/attempts.h"
#include "session/endings.h"
#include "spdlog/spdlog.h"
#include "status/try.h"

namespace drover::session {
namespace {

constexpr absl::Duration kGraceUnknown = absl::Seconds(10);  // of a code that is no longer there

bool runs(const process::Survey& found) {
  return found.found == process::Found::kRunning || found.found == process::Found::kUnwatched;
}

}  // namespace

absl::Duration Attempts::grace_of(const v1::Grant& grant) const {
  const code::Definition* const definition = tools_.catalogue.find(grant.code());
  return definition == nullptr ? kGraceUnknown : definition->grace;
}

void Attempts::recover() {
  std::vector<std::thread> ending;  // side by side, since each may take its code's whole grace
  for (const SpoolEntry& entry : tools_.spool.entries()) {
    if (entry.order && !entry.report && !entry.receipt) {
      ending.emplace_back([this, entry] { recover_one(entry); });
    } else {
      recover_one(entry);
    }
  }
  for (std::thread& thread : ending) thread.join();
}

void Attempts::recover_one(const SpoolEntry& entry) {
  const Key key = entry.key;
  if (entry.receipt) {
    clear_away(key);
    return;
  }
  if (!entry.order) {  // the grant was not written whole, so nothing was done for it
    if (const absl::Status status = tools_.spool.remove(key); !status.ok()) {
      spdlog::warn("cannot be removed: {}", std::string(status.message()));
    }
    return;
  }
  const absl::StatusOr<v1::Grant> grant = tools_.spool.order(key);
  if (!grant.ok()) {
    spdlog::error("an order in the spool cannot be read and is left there: {} run={} attempt={}",
                  std::string(grant.status().message()), key.run, key.fence);
    return;
  }
  tools_.roster.accept(*grant, tools_.clock.steady());
  if (!entry.report) {
    finish(key, *grant, report_of_predecessor(key, *grant));
    return;
  }
  spdlog::info("a report waits in the spool run={} attempt={} study={}", key.run, key.fence, grant->study());
  tools_.roster.ready(key);
  tools_.outbox.add(key);
  tools_.roster.wake();
}

absl::StatusOr<process::Survey> Attempts::end_predecessor(const Key& key, const v1::Grant& grant) {
  const std::string folder = tools_.spool.attempt_folder(key);
  const std::string& boot = tools_.options.machine.boot_id;
  const absl::Status ended = process::end_leftovers(tools_.files, folder, boot, grace_of(grant));
  if (!ended.ok()) {
    spdlog::error("processes of a lost attempt still run on this machine: {} run={} attempt={}",
                  std::string(ended.message()), key.run, key.fence);
  }
  return process::survey(tools_.files, folder, boot);
}

v1::AttemptReport Attempts::report_of_predecessor(const Key& key, const v1::Grant& grant) {
  const std::string folder = tools_.spool.attempt_folder(key);
  absl::StatusOr<process::Survey> found = process::survey(tools_.files, folder, tools_.options.machine.boot_id);
  const bool ran = found.ok() && runs(*found);
  if (ran) {
    spdlog::warn("a simulation of the worker's earlier life is ended run={} attempt={} study={}", key.run, key.fence,
                 grant.study());
    found = end_predecessor(key, grant);
  }
  if (!found.ok()) return lost(v1::LOSS_REASON_EXIT_UNKNOWN, std::string(found.status().message()));
  if (found->found == process::Found::kOrdered) {
    order_stop(key, kWorkerEnds);  // should a runner have been started at the last moment, it finds this
    return not_begun("its worker was started anew before it began");
  }
  // It may have come to its own end, seen by its runner, before the order to stop reached it.
  if (ran && found->found != process::Found::kEnded) {
    return lost(v1::LOSS_REASON_DAEMON_RESTART, "its worker was started anew, and ended what ran");
  }
  return conclude(key, grant, *found);
}

}  // namespace drover::session
