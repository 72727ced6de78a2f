#include "process/leftovers.h"

#include <signal.h>
#include <sys/syscall.h>
#include <unistd.h>

#include <algorithm>
#include <chrono>
#include <set>
#include <thread>
#include <vector>

#include "absl/strings/str_cat.h"
#include "process/attempt_folder.h"
#include "process/survey.h"
#include "status/try.h"

namespace drover::process {
namespace {

constexpr auto kLook = std::chrono::milliseconds(50);
constexpr absl::Duration kMargin = absl::Seconds(10);

using Moment = std::chrono::steady_clock::time_point;

Moment after(absl::Duration span) { return std::chrono::steady_clock::now() + absl::ToChronoMilliseconds(span); }

// Whether the process carries the attempt's mark: a file of its folder stands open in it (stdout, stderr, `alive`).
// That finds what has left its session and lost its parents, too.
bool carries(pid_t pid, const std::string& folder) {
  for (const char* const name : {"1", "2"}) {
    char target[4096];
    const std::string link = absl::StrCat("/proc/", pid, "/fd/", name);
    const ssize_t size = readlink(link.c_str(), target, sizeof(target));
    if (size > 0 &&
        std::string_view(target, static_cast<std::size_t>(size)).substr(0, folder.size() + 1) == folder + "/") {
      return true;
    }
  }
  return false;
}

// All that is left of the attempt, each by pid and start time.
std::vector<ProcessIdentity> left(const Begun& begun, const std::string& folder) {
  const std::vector<ProcessStat> all = all_processes();
  std::set<pid_t> ours;
  const bool runner_lives = is_alive(begun.runner), child_lives = is_alive(begun.child);
  if (runner_lives) ours.insert(begun.runner.pid);
  if (child_lives) ours.insert(begun.child.pid);
  std::vector<ProcessIdentity> found;
  for (bool changed = true; changed;) {
    changed = false;
    for (const ProcessStat& process : all) {
      if (process.state == 'Z' || process.state == 'X' || ours.contains(process.identity.pid)) continue;
      // Nothing of the attempt is older than its runner.
      if (process.identity.start < begun.runner.start) continue;
      const bool of_session = process.session == begun.runner.pid && (runner_lives || child_lives);
      if (!of_session && !ours.contains(process.parent) && !carries(process.identity.pid, folder)) continue;
      ours.insert(process.identity.pid);
      changed = true;
    }
  }
  for (const ProcessStat& process : all) {
    const bool alive = process.state != 'Z' && process.state != 'X';
    if (alive && ours.contains(process.identity.pid)) found.push_back(process.identity);
  }
  return found;
}

// Through a pidfd, so that the signal cannot reach a stranger who got the number meanwhile.
void send(const ProcessIdentity& process, int signal) {
  const int file = static_cast<int>(syscall(SYS_pidfd_open, process.pid, 0));
  if (file < 0) return;
  if (is_alive(process)) syscall(SYS_pidfd_send_signal, file, signal, nullptr, 0);
  close(file);
}

// Waits until `gone`, at most for `span`.
template <class Condition>
bool wait_until(Condition gone, absl::Duration span) {
  const Moment end = after(span);
  while (!gone()) {
    if (std::chrono::steady_clock::now() > end) return false;
    std::this_thread::sleep_for(kLook);
  }
  return true;
}

}  // namespace

absl::Status end_leftovers(Files& files, const std::string& folder, const std::string& boot_id, absl::Duration grace) {
  DROVER_ASSIGN(Survey seen, survey(files, folder, boot_id));
  if (seen.found == Found::kRunning) {
    // Its runner does this best, and then says how it ended. Without a `stop` on disk it could not know.
    DROVER_TRY(files.write_durably(absl::StrCat(folder, "/", kStopFile), ""));
    wait_until(
        [&] {
          const absl::StatusOr<Survey> now = survey(files, folder, boot_id);
          return now.ok() && now->found != Found::kRunning;
        },
        grace + kMargin);
    DROVER_ASSIGN(seen, survey(files, folder, boot_id));
  }
  if (!seen.begun || seen.begun->boot_id != boot_id) return absl::OkStatus();
  const auto none_left = [&] { return left(*seen.begun, folder).empty(); };
  if (none_left()) return absl::OkStatus();
  for (const ProcessIdentity& process : left(*seen.begun, folder)) send(process, SIGTERM);
  if (wait_until(none_left, grace)) return absl::OkStatus();
  const bool ended = wait_until(
      [&] {
        for (const ProcessIdentity& process : left(*seen.begun, folder)) send(process, SIGKILL);
        return none_left();
      },
      kMargin);
  if (ended) return absl::OkStatus();
  return absl::UnavailableError(absl::StrCat("processes of ", folder, " cannot be ended, not even by SIGKILL"));
}

}  // namespace drover::process
