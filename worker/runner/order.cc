#include "order.h"

#include <getopt.h>

#include <cerrno>
#include <cstdio>
#include <cstdlib>

namespace drover::runner {
namespace {

constexpr option kOptions[] = {{"folder", required_argument, nullptr, 'f'},
                               {"work", required_argument, nullptr, 'w'},
                               {"run", required_argument, nullptr, 'r'},
                               {"fence", required_argument, nullptr, 'n'},
                               {"time-limit-ms", required_argument, nullptr, 't'},
                               {"grace-ms", required_argument, nullptr, 'g'},
                               {"output-cap-bytes", required_argument, nullptr, 'c'},
                               {nullptr, 0, nullptr, 0}};

bool usage() {
  std::fputs("drover-runner --folder DIR --work DIR --run N --fence N --time-limit-ms N --grace-ms N\n"
             "              --output-cap-bytes N -- /PROGRAM ARGUMENT...\n"
             "Runs one attempt at a simulation for drover-worker; not meant to be started by hand.\n", stderr);
  return false;
}

bool number(const char* text, long long& value) {
  char* end = nullptr;
  errno = 0;
  value = std::strtoll(text, &end, 10);
  return errno == 0 && end != text && *end == '\0' && value >= 0;
}

}  // namespace

bool parse_order(int argc, char** argv, Order& order) {
  for (int option = 0; (option = getopt_long(argc, argv, "+", kOptions, nullptr)) != -1;) {
    bool fine = true;
    switch (option) {
      case 'f': order.folder = optarg; break;
      case 'w': order.work = optarg; break;
      case 'r': fine = number(optarg, order.run); break;
      case 'n': fine = number(optarg, order.fence); break;
      case 't': fine = number(optarg, order.time_limit_ms); break;
      case 'g': fine = number(optarg, order.grace_ms); break;
      case 'c': fine = number(optarg, order.output_cap_bytes); break;
      default: return usage();
    }
    if (!fine) return usage();
  }
  order.command = argv + optind;
  const bool whole = order.folder != nullptr && order.work != nullptr && order.time_limit_ms > 0 &&
                     order.output_cap_bytes > 0 && optind < argc && order.command[0][0] == '/';
  return whole || usage();
}

}  // namespace drover::runner
