// Starts a program apart from this one: a process group of its own (Ctrl-C in the terminal does not reach it), no open
// files but its log, no blocked or ignored signals.
#pragma once

#include <sys/types.h>

#include <optional>
#include <string>
#include <vector>

#include "absl/status/statusor.h"

namespace drover::commands {

struct ProgramCall {
  std::string program;                 // path
  std::vector<std::string> arguments;  // without the program's name
  std::string log;                     // file that standard output and error are appended to
};

// NOT_FOUND and others, in words, when it cannot be started.
absl::StatusOr<pid_t> start_process(const ProgramCall& call);

// How a child ended.
struct ProcessEnd {
  int exit_code = -1;  // -1: ended by a signal
  int signal = 0;
  std::string text() const;  // "exit code 2", "signal 9"
};

// Of a child of ours; nothing while it runs. Reaps it: ask once.
std::optional<ProcessEnd> process_end(pid_t child);

// The last lines of a log, fit for a terminal; empty when there are none.
std::string log_tail(const std::string& path, int lines = 10);

}  // namespace drover::commands
