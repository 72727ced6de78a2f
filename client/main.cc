// drover: starts studies, shows them, and searches on one machine alone.
#include <pwd.h>
#include <unistd.h>

#include <cstdlib>
#include <filesystem>
#include <iostream>
#include <string>
#include <system_error>
#include <vector>

#include "commands/command.h"
#include "link/address.h"
#include "link/clock.h"
#include "link/log.h"
#include "link/stopping.h"

namespace drover {
namespace {

std::string own_folder() {
  std::error_code error;
  const std::filesystem::path self = std::filesystem::read_symlink("/proc/self/exe", error);
  return error ? "." : self.parent_path().string();
}

std::string user_name() {
  const passwd* const entry = getpwuid(getuid());
  return entry == nullptr ? "user " + std::to_string(getuid()) : entry->pw_name;
}

std::string usual_coordinator() {
  const char* const named = std::getenv("DROVER_COORDINATOR");
  return named == nullptr || *named == '\0' ? link::default_address() : named;
}

int run(int argc, char** argv) {
  commands::Interruption interruption;
  // Ends at once where a command has nothing to finish, and at the second signal in any case.
  const auto stop = [&interruption](link::StopCause, int count) {
    if (count > 1 || !interruption.expected()) std::_Exit(static_cast<int>(commands::Exit::kNo));
    interruption.happen();
  };
  const auto watch = link::StopWatch::start(0, stop);
  if (!watch.ok()) {
    std::cerr << "drover: " << watch.status().message() << "\n";
    return static_cast<int>(commands::Exit::kNo);
  }
  const link::RealClock clock;
  const commands::Surroundings surroundings{.data = stdout,
                                            .messages = stderr,
                                            .clock = clock,
                                            .interruption = interruption,
                                            .version = DROVER_VERSION,
                                            .programs = own_folder(),
                                            .coordinator = usual_coordinator(),
                                            .user = user_name()};
  return commands::run(std::vector<std::string>(argv + 1, argv + argc), surroundings);
}

}  // namespace
}  // namespace drover

int main(int argc, char** argv) {
  drover::link::block_signals();
  drover::link::start_log("drover", drover::link::LogLevel::kError);
  return drover::run(argc, argv);
}
