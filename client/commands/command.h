// What a command of `drover` is: its help, its options, and what it does.
#pragma once

#include <cstdio>
#include <functional>
#include <memory>
#include <string>
#include <vector>

#include "absl/status/statusor.h"
#include "commands/coordinator.h"
#include "commands/exit_code.h"
#include "commands/interruption.h"
#include "commands/output.h"
#include "link/clock.h"

namespace CLI {
class App;
}

namespace drover::commands {

// What the program is given from outside; main makes the real one. Everything must outlive the command.
struct Surroundings {
  std::FILE* data = stdout;
  std::FILE* messages = stderr;
  const link::Clock& clock;
  Interruption& interruption;
  std::string version;
  std::string programs;     // the folder where drover-coordinator and drover-worker lie
  std::string coordinator;  // the address when nobody says otherwise
  std::string user;         // who starts studies
};

// What every command can use.
struct Context {
  const Surroundings& surroundings;
  Output& output;
  std::string address;

  // Says so once when nobody answers at first.
  absl::StatusOr<std::unique_ptr<Coordinator>> connect() const;
};

struct Command {
  std::string name;
  std::string summary;                     // one line
  std::string details;                     // further lines of help; may be empty
  std::vector<std::string> examples;       // whole command lines, the plainest first
  std::function<void(CLI::App&)> options;  // adds what is the command's own
  std::function<Exit(Context&)> run;       // called once, after the options were read
  bool asks_coordinator = true;            // has --coordinator
};

Command check_command();
Command solo_command();
Command start_command();
Command list_command();
Command show_command();
Command best_command();
Command runs_command();
Command table_command();
Command pause_command();
Command resume_command();
Command stop_command();

// `drover` with these arguments (without the program's own name). Never throws.
int run(const std::vector<std::string>& arguments, const Surroundings& surroundings);

}  // namespace drover::commands
