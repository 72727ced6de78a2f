#include "process/identity.h"

#include <dirent.h>

#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <sstream>

#include "absl/strings/str_cat.h"

namespace drover::process {

std::string boot_id() {
  std::ifstream file("/proc/sys/kernel/random/boot_id");
  std::string id;
  std::getline(file, id);
  return id;
}

std::optional<ProcessStat> stat_of(pid_t pid) {
  std::ifstream file(absl::StrCat("/proc/", pid, "/stat"));
  std::ostringstream text;
  text << file.rdbuf();
  const std::string line = text.str();
  // The name in parentheses may hold blanks and parentheses; what follows the last one does not.
  const std::size_t after = line.rfind(')');
  if (after == std::string::npos) return std::nullopt;
  ProcessStat stat;
  unsigned long long start = 0;
  const int read = std::sscanf(line.c_str() + after + 1,
                               " %c %d %d %d %*d %*d %*u %*u %*u %*u %*u %*u %*u %*d %*d %*d %*d %*d %*d %llu",
                               &stat.state, &stat.parent, &stat.group, &stat.session, &start);
  if (read != 5) return std::nullopt;
  stat.identity = {pid, start};
  return stat;
}

std::vector<ProcessStat> all_processes() {
  std::vector<ProcessStat> all;
  DIR* const proc = opendir("/proc");
  if (proc == nullptr) return all;
  while (const dirent* const entry = readdir(proc)) {
    const pid_t pid = std::atoi(entry->d_name);
    if (pid <= 0) continue;
    if (const std::optional<ProcessStat> stat = stat_of(pid)) all.push_back(*stat);
  }
  closedir(proc);
  return all;
}

bool is_alive(const ProcessIdentity& identity) {
  if (identity.pid <= 0) return false;
  const std::optional<ProcessStat> stat = stat_of(identity.pid);
  return stat && stat->identity == identity && stat->state != 'Z' && stat->state != 'X';
}

}  // namespace drover::process
