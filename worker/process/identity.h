// Which process is meant: a pid alone may belong to a stranger by now.
#pragma once

#include <sys/types.h>

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

namespace drover::process {

// Of this machine since it was started; empty where the kernel does not say.
std::string boot_id();

struct ProcessIdentity {
  pid_t pid = 0;
  std::uint64_t start = 0;  // in the kernel's ticks since it was started
  auto operator<=>(const ProcessIdentity&) const = default;
};

// A line of /proc/<pid>/stat; none: there is no such process.
struct ProcessStat {
  ProcessIdentity identity;
  pid_t parent = 0, group = 0, session = 0;
  char state = '?';
};
std::optional<ProcessStat> stat_of(pid_t pid);
std::vector<ProcessStat> all_processes();

// Whether exactly that process runs. A zombie is dead.
bool is_alive(const ProcessIdentity& identity);

}  // namespace drover::process
