// `drover-worker serve`: the daemon, from its command line to its end.
#pragma once

#include <string>
#include <vector>

namespace drover {

struct ServeOptions {
  std::string coordinator, codes, name, spool, scratch, runner;  // empty: the default
  std::vector<std::string> tags;
  int slots = 1;
  int owner = 0;  // ends when this process does; 0: nobody's
};

int serve(const ServeOptions& asked);

}  // namespace drover
