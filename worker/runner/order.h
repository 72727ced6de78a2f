// What a runner is told on its command line.
#pragma once

namespace drover::runner {

struct Order {
  const char* folder = nullptr;  // records, stdout, stderr
  const char* work = nullptr;    // where the program runs
  long long run = 0, fence = 0;
  long long time_limit_ms = 0;   // of the program, in time that counts suspend, too
  long long grace_ms = 0;        // between SIGTERM and SIGKILL
  long long output_cap_bytes = 0;  // of stdout and of stderr: beyond, head and tail are kept
  char** command = nullptr;      // command[0] an absolute path; ends with a null
};

// False, with the usage on stderr, when it is wrong.
bool parse_order(int argc, char** argv, Order& order);

}  // namespace drover::runner
