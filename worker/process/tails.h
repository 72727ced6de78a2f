// The end of a file.
#pragma once

#include <cstddef>
#include <string>

namespace drover::process {

// The last `most` bytes; empty when there is no such file or it cannot be read. Never follows a link.
std::string read_tail(const std::string& path, std::size_t most);

}  // namespace drover::process
