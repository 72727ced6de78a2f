#include "study/wording.h"

#include <algorithm>
#include <array>
#include <charconv>

#include "absl/strings/ascii.h"
#include "absl/strings/str_cat.h"

namespace drover::study {
namespace {

// Bytes of the UTF-8 character that `text` begins with; 0: none begins here. Overlong forms and surrogates are refused,
// as Protobuf does (RFC 3629, section 4).
std::size_t character_length(std::string_view text) {
  const auto byte = [&](std::size_t i) { return static_cast<unsigned char>(text[i]); };
  const unsigned char first = byte(0);
  const std::size_t length = first < 0x80                    ? 1
                             : first >= 0xC2 && first < 0xE0 ? 2
                             : (first & 0xF0U) == 0xE0       ? 3
                             : first >= 0xF0 && first < 0xF5 ? 4
                                                             : 0;
  if (length == 0 || length > text.size()) return 0;
  for (std::size_t i = 1; i < length; ++i) {
    if ((byte(i) & 0xC0U) != 0x80) return 0;
  }
  if (first == 0xE0 && byte(1) < 0xA0) return 0;
  if (first == 0xED && byte(1) >= 0xA0) return 0;
  if (first == 0xF0 && byte(1) < 0x90) return 0;
  if (first == 0xF4 && byte(1) >= 0x90) return 0;
  return length;
}

}  // namespace

std::string printable(std::string_view text, std::size_t most) {
  std::string out;
  for (std::size_t i = 0; i < text.size();) {
    const std::size_t length = character_length(text.substr(i));
    const bool plain = length > 0 && !absl::ascii_iscntrl(static_cast<unsigned char>(text[i]));
    const std::string_view piece = plain ? text.substr(i, length) : std::string_view("?");
    if (out.size() + piece.size() > most) return out + "...";
    out += piece;
    i += std::max<std::size_t>(length, 1);
  }
  return out;
}

std::string quoted(std::string_view text) { return "\"" + printable(text, 100) + "\""; }

std::string listed(std::span<const std::string> names, int most) {
  const std::size_t shown = std::min(names.size(), static_cast<std::size_t>(std::max(most, 1)));
  std::string text;
  for (std::size_t i = 0; i < shown; ++i) {
    const bool last = i + 1 == names.size();
    if (i > 0) text += last ? " and " : ", ";
    text += names[i];
  }
  if (shown < names.size()) absl::StrAppend(&text, " and ", names.size() - shown, " more");
  return text;
}

std::string number_text(double value) {
  std::array<char, 40> text{};
  const auto written = std::to_chars(text.data(), text.data() + text.size(), value);
  return std::string(text.data(), written.ptr);
}

}  // namespace drover::study
