// What this machine is, as a worker says it when it enrols.
#pragma once

#include <cstdint>
#include <string>

namespace drover::session {

struct Machine {
  std::string host;               // its name; "unknown" where it has none
  std::string boot_id;            // changes with a reboot; empty: the kernel does not say
  int cores = 1;                  // that this process may use
  std::int64_t memory_bytes = 0;  // of the whole machine
};

Machine this_machine();

}  // namespace drover::session
