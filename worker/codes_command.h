// `drover-worker codes`: what the definitions in a folder say, and what is wrong with them.
#pragma once

#include <string>

namespace drover {

// The exit code: 2 when a definition is wrong or the folder is not there.
int show_codes(const std::string& folder, bool json);

}  // namespace drover
