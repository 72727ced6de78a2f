#include "session/machine.h"

#include <sched.h>
#include <unistd.h>

#include <algorithm>
#include <array>

#include "link/text.h"
#include "process/identity.h"

namespace drover::session {
namespace {

std::string host_name() {
  std::array<char, 256> name{};
  if (gethostname(name.data(), name.size() - 1) != 0 || name[0] == '\0') return "unknown";
  return link::clean_utf8(name.data());
}

int usable_cores() {
  cpu_set_t set;
  if (sched_getaffinity(0, sizeof set, &set) == 0) return std::max(1, CPU_COUNT(&set));
  return static_cast<int>(std::max(1L, sysconf(_SC_NPROCESSORS_ONLN)));  // more cores than the set can name
}

}  // namespace

Machine this_machine() {
  Machine machine;
  machine.host = host_name();
  machine.boot_id = process::boot_id();
  machine.cores = usable_cores();
  machine.memory_bytes = static_cast<std::int64_t>(sysconf(_SC_PHYS_PAGES)) * sysconf(_SC_PAGESIZE);
  return machine;
}

}  // namespace drover::session
