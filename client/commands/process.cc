#include "commands/process.h"

#include <fcntl.h>
#include <signal.h>
#include <spawn.h>
#include <sys/wait.h>

#include <cerrno>
#include <cstring>
#include <fstream>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "absl/strings/str_split.h"
#include "link/text.h"

extern char** environ;

namespace drover::commands {
namespace {

class SpawnSettings {
 public:
  explicit SpawnSettings(const std::string& log) {
    posix_spawn_file_actions_init(&actions_);
    posix_spawn_file_actions_addopen(&actions_, 0, "/dev/null", O_RDONLY, 0);
    posix_spawn_file_actions_addopen(&actions_, 1, log.c_str(), O_WRONLY | O_CREAT | O_APPEND, 0600);
    posix_spawn_file_actions_adddup2(&actions_, 1, 2);
    posix_spawn_file_actions_addclosefrom_np(&actions_, 3);
    sigset_t none, all;
    sigemptyset(&none);
    sigfillset(&all);
    posix_spawnattr_init(&attributes_);
    posix_spawnattr_setsigmask(&attributes_, &none);
    posix_spawnattr_setsigdefault(&attributes_, &all);
    posix_spawnattr_setpgroup(&attributes_, 0);
    posix_spawnattr_setflags(&attributes_, POSIX_SPAWN_SETPGROUP | POSIX_SPAWN_SETSIGMASK | POSIX_SPAWN_SETSIGDEF);
  }
  ~SpawnSettings() {
    posix_spawn_file_actions_destroy(&actions_);
    posix_spawnattr_destroy(&attributes_);
  }
  SpawnSettings(const SpawnSettings&) = delete;
  SpawnSettings& operator=(const SpawnSettings&) = delete;

  int spawn(const ProgramCall& call, pid_t* child) const {
    std::vector<char*> words = {const_cast<char*>(call.program.c_str())};
    for (const std::string& argument : call.arguments) words.push_back(const_cast<char*>(argument.c_str()));
    words.push_back(nullptr);
    return posix_spawn(child, call.program.c_str(), &actions_, &attributes_, words.data(), environ);
  }

 private:
  posix_spawn_file_actions_t actions_;
  posix_spawnattr_t attributes_;
};

}  // namespace

absl::StatusOr<pid_t> start_process(const ProgramCall& call) {
  pid_t child = 0;
  const int error = SpawnSettings(call.log).spawn(call, &child);
  if (error == 0) return child;
  return absl::Status(absl::ErrnoToStatusCode(error),
                      absl::StrCat(call.program, " cannot be started with its log in ", call.log, ": ",
                                   std::strerror(error), "; is Drover installed completely?"));
}

std::string ProcessEnd::text() const {
  return exit_code >= 0 ? absl::StrCat("exit code ", exit_code) : absl::StrCat("signal ", signal);
}

std::optional<ProcessEnd> process_end(pid_t child) {
  int status = 0;
  pid_t answer = 0;
  do {
    answer = waitpid(child, &status, WNOHANG);
  } while (answer < 0 && errno == EINTR);
  if (answer == 0) return std::nullopt;
  if (answer < 0) return ProcessEnd{};  // reaped by somebody else: it is gone in any case
  if (WIFSIGNALED(status)) return ProcessEnd{.exit_code = -1, .signal = WTERMSIG(status)};
  return ProcessEnd{.exit_code = WEXITSTATUS(status), .signal = 0};
}

std::string log_tail(const std::string& path, int lines) {
  constexpr std::streamoff kMost = 16 * 1024;
  std::ifstream in(path, std::ios::binary | std::ios::ate);
  const std::streamoff size = in ? static_cast<std::streamoff>(in.tellg()) : 0;
  if (size <= 0) return "";
  in.seekg(std::max<std::streamoff>(0, size - kMost));
  const std::string text((std::istreambuf_iterator<char>(in)), {});
  std::vector<std::string> all = absl::StrSplit(text, '\n', absl::SkipEmpty());
  if (all.size() > static_cast<std::size_t>(lines)) all.erase(all.begin(), all.end() - lines);
  return link::printable(absl::StrJoin(all, "\n"), /*keep_lines=*/true);
}

}  // namespace drover::commands
