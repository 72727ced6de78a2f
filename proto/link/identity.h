// Random identities: request ids, session tokens, seeds. From the kernel's generator; never for a search.
#pragma once

#include <cstdint>
#include <string>

namespace drover::link {

std::string random_id();  // 32 lower-case hexadecimal digits (128 bits)
std::uint64_t random_number();

}  // namespace drover::link
