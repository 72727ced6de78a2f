#include "process/launch.h"

#include <fcntl.h>
#include <signal.h>
#include <spawn.h>

#include <cstring>

#include "absl/strings/str_cat.h"
#include "process/attempt_folder.h"

namespace drover::process {
namespace {

std::vector<std::string> runner_arguments(const Launch& what) {
  std::vector<std::string> arguments = {
      what.runner, "--folder", what.folder, "--work", what.work, "--run", absl::StrCat(what.run), "--fence",
      absl::StrCat(what.fence), "--time-limit-ms", absl::StrCat(absl::ToInt64Milliseconds(what.time_limit)),
      "--grace-ms", absl::StrCat(absl::ToInt64Milliseconds(what.grace)), "--output-cap-bytes",
      absl::StrCat(what.output_cap_bytes), "--"};
  arguments.insert(arguments.end(), what.command.begin(), what.command.end());
  return arguments;
}

// Valid as long as `texts` is not touched.
std::vector<char*> pointers_to(std::vector<std::string>& texts) {
  std::vector<char*> pointers;
  for (std::string& text : texts) pointers.push_back(text.data());
  pointers.push_back(nullptr);
  return pointers;
}

// posix_spawn's settings, released with it.
struct Spawn {
  posix_spawn_file_actions_t files;
  posix_spawnattr_t attributes;
  Spawn() {
    posix_spawn_file_actions_init(&files);
    posix_spawnattr_init(&attributes);
  }
  ~Spawn() {
    posix_spawn_file_actions_destroy(&files);
    posix_spawnattr_destroy(&attributes);
  }
  Spawn(const Spawn&) = delete;
  Spawn& operator=(const Spawn&) = delete;
};

}  // namespace

absl::StatusOr<pid_t> launch(const Launch& what) {
  std::vector<std::string> arguments = runner_arguments(what);
  std::vector<std::string> environment = what.environment;
  Spawn spawn;
  const std::string log = absl::StrCat(what.folder, "/", kRunnerLogFile);
  posix_spawn_file_actions_addopen(&spawn.files, 0, "/dev/null", O_RDONLY, 0);
  posix_spawn_file_actions_addopen(&spawn.files, 1, log.c_str(), O_WRONLY | O_CREAT | O_APPEND, 0600);
  posix_spawn_file_actions_adddup2(&spawn.files, 1, 2);
  sigset_t all, none;
  sigfillset(&all);
  sigemptyset(&none);
  posix_spawnattr_setsigdefault(&spawn.attributes, &all);
  posix_spawnattr_setsigmask(&spawn.attributes, &none);
  posix_spawnattr_setflags(&spawn.attributes, POSIX_SPAWN_SETSIGDEF | POSIX_SPAWN_SETSIGMASK);
  pid_t pid = 0;
  const int error = posix_spawn(&pid, what.runner.c_str(), &spawn.files, &spawn.attributes,
                                pointers_to(arguments).data(), pointers_to(environment).data());
  if (error != 0) return absl::UnavailableError(absl::StrCat("cannot start ", what.runner, ": ", std::strerror(error)));
  return pid;
}

}  // namespace drover::process
