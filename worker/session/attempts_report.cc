// From the end of a runner to a report in the spool.
#include <utility>

#include "absl/strings/str_cat.h"
#include "code/verdict.h"
#include "process/attempt_folder.h"
#include "process/tails.h"
#include "session/attempts.h"
#include "session/endings.h"
#include "spdlog/spdlog.h"

namespace drover::session {
namespace {

constexpr std::size_t kLogTail = 2 << 10;

std::string words(const v1::AttemptReport& report) {
  switch (report.ending()) {
    case v1::ENDING_EVALUATED:
      return "evaluated";
    case v1::ENDING_FAILED:
      return absl::StrCat("failed: ", report.reason());
    case v1::ENDING_LOST:
      return absl::StrCat("lost: ", report.reason());
    case v1::ENDING_NOT_BEGUN:
      return absl::StrCat("handed back: ", report.reason());
    case v1::ENDING_STOPPED:
      return absl::StrCat("stopped: ", report.reason());
    default:
      return "ended";
  }
}

}  // namespace

void Attempts::ended(const Key& key) {
  const std::optional<Attempt> attempt = tools_.roster.find(key);
  if (!attempt) return;
  tools_.roster.ended(key);
  const std::string folder = tools_.spool.attempt_folder(key);
  absl::StatusOr<process::Survey> found = process::survey(tools_.files, folder, tools_.options.machine.boot_id);
  if (found.ok() && (found->found == process::Found::kUnwatched || found->found == process::Found::kRunning)) {
    // Its runner was killed, and nobody will learn how it ends: it is ended, so that the slot is free in truth.
    found = end_predecessor(key, attempt->grant);
  }
  v1::AttemptReport report = found.ok() ? conclude(key, attempt->grant, *found)
                                        : lost(v1::LOSS_REASON_EXIT_UNKNOWN, std::string(found.status().message()));
  if (report.ending() == v1::ENDING_STOPPED && attempt->stop_asked) {
    report.set_reason(absl::StrCat("asked to: ", attempt->stop_reason));
  }
  finish(key, attempt->grant, std::move(report));
}

v1::AttemptReport Attempts::conclude(const Key& key, const v1::Grant& grant, const process::Survey& found) const {
  switch (found.found) {
    case process::Found::kEnded:
      return judge(key, grant, found);
    case process::Found::kOrdered:
      return runner_failed(key);
    case process::Found::kRebooted:
      return lost(v1::LOSS_REASON_REBOOT, "the machine was started anew while it ran");
    default:
      return lost(v1::LOSS_REASON_EXIT_UNKNOWN, "its runner was killed, so nobody saw how it ended");
  }
}

v1::AttemptReport Attempts::runner_failed(const Key& key) const {
  const std::string log = process::read_tail(file(key, process::kRunnerLogFile), kLogTail);
  return lost(v1::LOSS_REASON_SITE,
              absl::StrCat("its runner ", tools_.options.runner, " ended before it could start the program",
                           log.empty() ? "" : ": ", log));
}

bool Attempts::stop_was_ordered(const Key& key) const {
  const std::string why = tools_.files.read(file(key, process::kStopFile)).value_or("");
  return !why.empty() && why != kWorkerEnds;  // process::end_leftovers() leaves it empty
}

v1::AttemptReport Attempts::judge(const Key& key, const v1::Grant& grant, const process::Survey& found) const {
  const absl::StatusOr<const code::Definition*> definition = definition_of(grant);
  if (!definition.ok()) {
    return lost(v1::LOSS_REASON_SITE, absl::StrCat("it ended, and its result cannot be read any more: ",
                                                   std::string(definition.status().message())));
  }
  if (found.ended->cause == process::Ended::Cause::kStopped && !stop_was_ordered(key)) {
    return lost(v1::LOSS_REASON_DAEMON_RESTART, "its worker ended, and stopped what ran");
  }
  code::Definition as_run = **definition;
  as_run.time_limit = time_limit(grant, as_run);
  return code::judge(as_run, how_it_ended(found), work_folder(key), file(key, process::kStdoutFile),
                     file(key, process::kStderrFile));
}

void Attempts::finish(const Key& key, const v1::Grant& grant, v1::AttemptReport report) {
  report.set_run(key.run);
  report.set_fence(key.fence);
  report.set_input_digest(grant.input_digest());
  fit(report);
  for (;;) {
    const absl::Status written = tools_.spool.write_report(report);
    if (written.ok()) break;
    spdlog::error("a report cannot be written and is kept back until it can: {} run={} attempt={} study={}",
                  std::string(written.message()), key.run, key.fence, grant.study());
    if (!pause_.wait(tools_.options.times.disk_retry)) return;  // the runner's record stays for the next start
  }
  spdlog::info("{} run={} attempt={} study={} number={}", words(report), key.run, key.fence, grant.study(),
               grant.number());
  // In this order, so that the report is what asks for the next run of the slot.
  tools_.roster.ready(key);
  tools_.outbox.add(key);
  tools_.roster.wake();
}

void Attempts::acknowledged(const Key& key) {
  clear_away(key);
  tools_.outbox.remove(key);
  tools_.roster.forget(key);
}

// What is large; the report and its receipt stay for the retention.
void Attempts::clear_away(const Key& key) {
  for (const std::string& path : {work_folder(key), file(key, process::kStdoutFile), file(key, process::kStderrFile)}) {
    if (const absl::Status status = tools_.files.remove_tree(path); !status.ok()) {
      spdlog::warn("cannot be removed: {} run={} attempt={}", std::string(status.message()), key.run, key.fence);
    }
  }
}

}  // namespace drover::session
