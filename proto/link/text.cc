#include "link/text.h"

#include <array>
#include <cstdint>
#include <cstdio>
#include <optional>

namespace drover::link {
namespace {

struct Character {
  std::uint32_t code = 0;
  std::size_t bytes = 0;
};

// The character at the beginning of `text`, by table 3-7 of the Unicode standard: no overlong forms, no surrogates.
std::optional<Character> decode(std::string_view text) {
  const auto at = [&](std::size_t i) { return static_cast<std::uint8_t>(text[i]); };
  const std::uint8_t lead = at(0);
  if (lead < 0x80) return Character{lead, 1};
  const std::size_t bytes = lead >= 0xF0 ? 4 : lead >= 0xE0 ? 3 : 2;
  if (lead < 0xC2 || lead > 0xF4 || text.size() < bytes) return std::nullopt;
  std::uint32_t code = lead & (0xFFu >> (bytes + 1));
  for (std::size_t i = 1; i < bytes; ++i) {
    if ((at(i) & 0xC0) != 0x80) return std::nullopt;
    code = (code << 6) | (at(i) & 0x3Fu);
  }
  constexpr std::array<std::uint32_t, 5> kLeast = {0, 0, 0x80, 0x800, 0x10000};
  const bool surrogate = code >= 0xD800 && code <= 0xDFFF;
  if (code < kLeast[bytes] || code > 0x10FFFF || surrogate) return std::nullopt;
  return Character{code, bytes};
}

bool is_control(std::uint32_t code) {
  const bool bidirectional = (code >= 0x202A && code <= 0x202E) || (code >= 0x2066 && code <= 0x2069) ||
                             code == 0x200E || code == 0x200F || code == 0x061C;
  return code < 0x20 || (code >= 0x7F && code <= 0x9F) || bidirectional;
}

std::string escaped(std::uint32_t code) {
  std::array<char, 16> text{};
  std::snprintf(text.data(), text.size(), code < 0x100 ? "\\x%02x" : "\\u{%04x}", code);
  return text.data();
}

}  // namespace

std::string clean_utf8(std::string_view bytes) {
  std::string clean;
  clean.reserve(bytes.size());
  while (!bytes.empty()) {
    const std::optional<Character> character = decode(bytes);
    if (character) {
      clean.append(bytes.substr(0, character->bytes));
    } else {
      clean.append("\xEF\xBF\xBD");
    }
    bytes.remove_prefix(character ? character->bytes : 1);
  }
  return clean;
}

std::string printable(std::string_view bytes, bool keep_lines) {
  const std::string clean = clean_utf8(bytes);
  std::string shown;
  for (std::string_view rest = clean; !rest.empty();) {
    const Character character = *decode(rest);
    const bool kept = !is_control(character.code) || (keep_lines && (character.code == '\n' || character.code == '\t'));
    shown.append(kept ? std::string(rest.substr(0, character.bytes)) : escaped(character.code));
    rest.remove_prefix(character.bytes);
  }
  return shown;
}

}  // namespace drover::link
