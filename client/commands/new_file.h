// Writes a file so that it is whole or not there.
#pragma once

#include <string>
#include <string_view>

#include "absl/status/status.h"

namespace drover::commands {

// Temporary name beside it, written, synced, renamed. After an error an old file is unchanged. Errors name the path.
absl::Status write_file(const std::string& path, std::string_view bytes);

}  // namespace drover::commands
