#include "link/text.h"

#include <cstddef>
#include <cstdint>

#include "absl/strings/str_format.h"

namespace drover::link {
namespace {

constexpr std::string_view kReplacement = "\xEF\xBF\xBD";

struct Symbol {
  std::uint32_t code = 0;
  std::size_t bytes = 0;  // 0: the first byte begins no valid symbol
};

// The Unicode Standard 15.0, table 3-7: which byte sequences are well formed.
Symbol first_symbol(std::string_view text) {
  const auto byte = [&](std::size_t i) { return i < text.size() ? static_cast<unsigned char>(text[i]) : 0u; };
  const auto follows = [&](std::size_t i) { return (byte(i) & 0xC0u) == 0x80u; };
  const std::uint32_t lead = byte(0);
  if (lead < 0x80) return {lead, 1};
  if (lead >= 0xC2 && lead <= 0xDF && follows(1)) return {(lead & 0x1Fu) << 6 | (byte(1) & 0x3Fu), 2};
  if (lead >= 0xE0 && lead <= 0xEF && follows(1) && follows(2)) {
    const std::uint32_t code = (lead & 0x0Fu) << 12 | (byte(1) & 0x3Fu) << 6 | (byte(2) & 0x3Fu);
    if (code >= 0x800 && (code < 0xD800 || code > 0xDFFF)) return {code, 3};
  }
  if (lead >= 0xF0 && lead <= 0xF4 && follows(1) && follows(2) && follows(3)) {
    const std::uint32_t code =
        (lead & 0x07u) << 18 | (byte(1) & 0x3Fu) << 12 | (byte(2) & 0x3Fu) << 6 | (byte(3) & 0x3Fu);
    if (code >= 0x10000 && code <= 0x10FFFF) return {code, 4};
  }
  return {};
}

bool is_control(std::uint32_t code) { return code < 0x20 || (code >= 0x7F && code <= 0x9F); }

// What can reorder a line on a screen or begin a new one.
bool moves_text(std::uint32_t code) {
  return code == 0x061C || code == 0x200E || code == 0x200F || (code >= 0x2028 && code <= 0x202E) ||
         (code >= 0x2066 && code <= 0x2069);
}

}  // namespace

std::string clean_utf8(std::string_view bytes) {
  std::string clean;
  clean.reserve(bytes.size());
  while (!bytes.empty()) {
    const Symbol symbol = first_symbol(bytes);
    const std::size_t taken = symbol.bytes == 0 ? 1 : symbol.bytes;
    clean += symbol.bytes == 0 ? kReplacement : bytes.substr(0, taken);
    bytes.remove_prefix(taken);
  }
  return clean;
}

std::string printable(std::string_view bytes, bool keep_lines) {
  std::string shown;
  shown.reserve(bytes.size());
  while (!bytes.empty()) {
    const Symbol symbol = first_symbol(bytes);
    const std::size_t taken = symbol.bytes == 0 ? 1 : symbol.bytes;
    if (symbol.bytes == 0) {
      shown += kReplacement;
    } else if (keep_lines && symbol.code == '\n') {
      shown += '\n';
    } else if (is_control(symbol.code)) {
      shown += absl::StrFormat("\\x%02x", symbol.code);
    } else if (moves_text(symbol.code)) {
      shown += absl::StrFormat("\\u{%04x}", symbol.code);
    } else {
      shown += bytes.substr(0, taken);
    }
    bytes.remove_prefix(taken);
  }
  return shown;
}

}  // namespace drover::link
