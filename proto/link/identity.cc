#include "link/identity.h"

#include <sys/random.h>

#include <cerrno>
#include <cstdlib>

#include "absl/strings/str_format.h"

namespace drover::link {

std::uint64_t random_number() {
  std::uint64_t number = 0;
  // Up to 256 bytes come whole or not at all; a signal can interrupt only the wait at boot.
  while (getrandom(&number, sizeof number, 0) != static_cast<ssize_t>(sizeof number)) {
    if (errno != EINTR) std::abort();  // a kernel without a generator: no identity could be trusted
  }
  return number;
}

std::string random_id() { return absl::StrFormat("%016x%016x", random_number(), random_number()); }

}  // namespace drover::link
