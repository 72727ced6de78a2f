#include "commands/predecessors.h"

#include <fstream>
#include <sstream>

#include "absl/strings/str_cat.h"
#include "commands/new_file.h"

namespace drover::commands {
namespace {

// In clock ticks since the machine started; 0: there is no such process, or it has ended and is not reaped yet.
unsigned long long start_time(pid_t process) {
  std::ifstream in(absl::StrCat("/proc/", process, "/stat"));
  std::string line;
  if (!std::getline(in, line)) return 0;
  // The second field is the program's name, which may hold spaces and brackets; what follows it does not.
  const std::size_t name_end = line.rfind(')');
  if (name_end == std::string::npos) return 0;
  std::istringstream fields(line.substr(name_end + 1));
  constexpr int kState = 3, kStartTime = 22;  // proc(5)
  std::string field;
  for (int i = kState; i < kStartTime; ++i) {
    fields >> field;
    if (i == kState && field == "Z") return 0;
  }
  unsigned long long ticks = 0;
  return fields >> ticks ? ticks : 0;
}

}  // namespace

absl::Status record_daemons(const std::string& file, const std::vector<pid_t>& daemons) {
  std::string text;
  for (const pid_t daemon : daemons) {
    const unsigned long long started = daemon > 0 ? start_time(daemon) : 0;
    if (started > 0) absl::StrAppend(&text, daemon, " ", started, "\n");
  }
  return write_file(file, text);
}

std::vector<pid_t> recorded_daemons(const std::string& file) {
  std::vector<pid_t> running;
  std::ifstream in(file);
  pid_t process = 0;
  unsigned long long started = 0;
  while (in >> process >> started) {
    if (process > 0 && start_time(process) == started) running.push_back(process);
  }
  return running;
}

void await_predecessors(const std::string& file, const link::Clock& clock, const Interruption& interruption,
                        absl::Duration limit) {
  constexpr absl::Duration kGlance = absl::Milliseconds(50);
  const absl::Duration end = clock.steady() + limit;
  while (!recorded_daemons(file).empty() && clock.steady() < end) {
    if (interruption.wait(kGlance)) return;
  }
}

}  // namespace drover::commands
