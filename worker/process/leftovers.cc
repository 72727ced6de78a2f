#include "process/leftovers.h"

#include <fcntl.h>
#include <signal.h>
#include <sys/stat.h>
#include <sys/syscall.h>
#include <unistd.h>

#include <chrono>
#include <cstdint>
#include <filesystem>
#include <fstream>
#include <optional>
#include <set>
#include <thread>
#include <tuple>
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

// The files of an attempt's folder that stand open in its processes. Compared by device and number: a path may lead to
// them in many ways.
class Marks {
 public:
  explicit Marks(const std::string& folder)
      : stdout_(id_of(absl::StrCat(folder, "/", kStdoutFile))),
        stderr_(id_of(absl::StrCat(folder, "/", kStderrFile))),
        alive_(id_of(absl::StrCat(folder, "/", kAliveFile))) {}

  // That finds what has left its session and lost its parents, too. Who only reads stdout, or asks about the lock
  // `alive` without holding it, is a stranger.
  bool are_on(pid_t pid) const {
    if (pid == getpid()) return false;
    const std::string process = absl::StrCat("/proc/", pid);
    for (const char* const output : {"/fd/1", "/fd/2"}) {
      const Id id = id_of(process + output);
      if (id && (id == stdout_ || id == stderr_)) return true;
    }
    return alive_ && holds_alive(process);
  }

 private:
  using Id = std::optional<std::tuple<std::uint32_t, std::uint32_t, std::uint64_t>>;
  // Asks no file server: one that hangs would hang us with it, for the sake of a stranger's file.
  static Id id_of(const std::string& path) {
    struct statx info {};
    if (statx(AT_FDCWD, path.c_str(), AT_STATX_DONT_SYNC, STATX_INO, &info) != 0) return std::nullopt;
    return std::tuple(info.stx_dev_major, info.stx_dev_minor, info.stx_ino);
  }
  bool holds_alive(const std::string& process) const {
    std::error_code unreadable;  // somebody else's, or gone
    for (std::filesystem::directory_iterator at(process + "/fd", unreadable), end; at != end;
         at.increment(unreadable)) {
      if (id_of(at->path()) != alive_) continue;
      std::ifstream file(process + "/fdinfo/" + at->path().filename().string());
      for (std::string line; std::getline(file, line);) {
        if (line.starts_with("lock:")) return true;
      }
    }
    return false;
  }

  Id stdout_, stderr_, alive_;
};

bool runs(const ProcessStat& process) { return process.state != 'Z' && process.state != 'X'; }

// What is left of one attempt, each process by pid and start time.
class Leftovers {
 public:
  Leftovers(const Begun& begun, const std::string& folder) : begun_(begun), marks_(folder) {}

  // All that runs now. Who was found once stays known when what led to it has gone.
  std::vector<ProcessIdentity> look() {
    std::vector<ProcessStat> all = all_processes();
    // Nothing of the attempt is older than its runner.
    std::erase_if(all, [&](const ProcessStat& p) { return !runs(p) || p.identity.start < begun_.runner.start; });
    const bool session_is_ours = is_alive(begun_.runner) || is_alive(begun_.child);
    std::set<pid_t> ours;
    std::vector<ProcessIdentity> found;
    const auto add = [&](const ProcessStat& process) {
      ours.insert(process.identity.pid);
      found.push_back(process.identity);
      known_.insert(process.identity);
    };
    for (const ProcessStat& process : all) {
      const bool of_session = session_is_ours && process.session == begun_.runner.pid;
      if (is_known(process.identity) || of_session || marks_.are_on(process.identity.pid)) add(process);
    }
    for (bool changed = true; changed;) {
      changed = false;
      for (const ProcessStat& process : all) {
        if (ours.contains(process.identity.pid) || !ours.contains(process.parent)) continue;
        add(process);
        changed = true;
      }
    }
    return found;
  }

 private:
  bool is_known(const ProcessIdentity& process) const {
    return process == begun_.runner || process == begun_.child || known_.contains(process);
  }

  Begun begun_;
  Marks marks_;
  std::set<ProcessIdentity> known_;
};

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

// Its runner does this best, and then says how it ended. False: it did not, or could not be told.
absl::StatusOr<bool> end_by_runner(Files& files, const std::string& folder, const std::string& boot_id,
                                   absl::Duration grace) {
  DROVER_ASSIGN(const Survey seen, survey(files, folder, boot_id));
  if (seen.found != Found::kRunning) return false;
  if (!files.write_durably(absl::StrCat(folder, "/", kStopFile), "").ok()) return false;
  return wait_until(
      [&] {
        const absl::StatusOr<Survey> now = survey(files, folder, boot_id);
        return now.ok() && now->found != Found::kRunning;
      },
      grace + kMargin);
}

absl::Status end_by_signals(const Begun& begun, const std::string& folder, absl::Duration grace) {
  Leftovers leftovers(begun, folder);
  const auto none_left = [&] { return leftovers.look().empty(); };
  const std::vector<ProcessIdentity> first = leftovers.look();
  if (first.empty()) return absl::OkStatus();
  // A runner that lives would take the end we bring about for the simulation's own.
  send(begun.runner, SIGKILL);
  for (const ProcessIdentity& process : first) send(process, SIGTERM);
  for (const ProcessIdentity& process : first) send(process, SIGCONT);  // a stopped one would not hear it
  if (wait_until(none_left, grace)) return absl::OkStatus();
  const bool ended = wait_until(
      [&] {
        for (const ProcessIdentity& process : leftovers.look()) send(process, SIGKILL);
        return none_left();
      },
      kMargin);
  if (ended) return absl::OkStatus();
  return absl::UnavailableError(absl::StrCat("processes of ", folder, " cannot be ended, not even by SIGKILL"));
}

}  // namespace

absl::Status end_leftovers(Files& files, const std::string& folder, const std::string& boot_id, absl::Duration grace) {
  DROVER_TRY(end_by_runner(files, folder, boot_id, grace).status());
  DROVER_ASSIGN(const Survey seen, survey(files, folder, boot_id));
  if (seen.begun && seen.begun->boot_id == boot_id) return end_by_signals(*seen.begun, folder, grace);
  if (seen.found != Found::kRunning) return absl::OkStatus();
  return absl::UnavailableError(absl::StrCat("the runner of ", folder, " has not said yet what it runs"));
}

}  // namespace drover::process
