#include "link/identity.h"

#include <sys/random.h>

#include <array>
#include <cstdlib>
#include <cstring>

#include "absl/strings/escaping.h"

namespace drover::link {
namespace {

template <std::size_t kSize>
std::array<char, kSize> random_bytes() {
  std::array<char, kSize> bytes{};
  // Up to 256 bytes come whole once the kernel's generator is ready; without it no identity would be unguessable.
  if (getrandom(bytes.data(), bytes.size(), 0) != static_cast<ssize_t>(bytes.size())) std::abort();
  return bytes;
}

}  // namespace

std::string random_id() {
  const std::array<char, 16> bytes = random_bytes<16>();
  return absl::BytesToHexString({bytes.data(), bytes.size()});
}

std::uint64_t random_number() {
  const std::array<char, 8> bytes = random_bytes<8>();
  std::uint64_t number = 0;
  std::memcpy(&number, bytes.data(), sizeof(number));
  return number;
}

}  // namespace drover::link
