// Texts that come from elsewhere, made fit to send and to show.
#pragma once

#include <string>
#include <string_view>

namespace drover::link {

// Valid UTF-8: each byte that is none becomes U+FFFD. proto3 strings must be.
std::string clean_utf8(std::string_view bytes);

// Fit for a terminal or a log: valid UTF-8 with control characters (below 0x20, 0x7f to 0x9f, bidirectional controls)
// shown as \xNN or \u{NNNN}. Line ends stay when `keep_lines`.
std::string printable(std::string_view bytes, bool keep_lines = false);

}  // namespace drover::link
