#include "study/names.h"

#include <algorithm>
#include <cstddef>
#include <vector>

#include "absl/strings/ascii.h"
#include "absl/strings/str_cat.h"
#include "study/limits.h"

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

int edit_distance(std::string_view a, std::string_view b) {
  std::vector<int> before_last(b.size() + 1);
  std::vector<int> last(b.size() + 1);
  std::vector<int> row(b.size() + 1);
  for (std::size_t j = 0; j <= b.size(); ++j) last[j] = static_cast<int>(j);
  for (std::size_t i = 1; i <= a.size(); ++i) {
    row[0] = static_cast<int>(i);
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const int change = a[i - 1] == b[j - 1] ? 0 : 1;
      row[j] = std::min({last[j] + 1, row[j - 1] + 1, last[j - 1] + change});
      const bool swapped = i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1];
      if (swapped) row[j] = std::min(row[j], before_last[j - 2] + 1);
    }
    std::swap(before_last, last);
    std::swap(last, row);
  }
  return last[b.size()];
}

std::string nearest(std::string_view text, std::span<const std::string> candidates) {
  if (text.empty() || text.size() > kMostNameLength) return "";
  const std::string wanted = absl::AsciiStrToLower(std::string(text));
  const std::string* best = nullptr;
  int least = 0;
  for (const std::string& candidate : candidates) {
    if (candidate.empty() || candidate.size() > kMostNameLength) continue;
    const int distance = edit_distance(wanted, absl::AsciiStrToLower(candidate));
    if (best != nullptr && distance >= least) continue;
    best = &candidate;
    least = distance;
  }
  if (best == nullptr) return "";
  const std::size_t letters = std::max(wanted.size(), best->size());
  const bool near = static_cast<std::size_t>(least) * 3 <= letters;
  return near ? *best : "";
}

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

bool is_identifier(std::string_view name) {
  if (name.empty() || absl::ascii_isdigit(static_cast<unsigned char>(name.front()))) return false;
  return std::all_of(name.begin(), name.end(),
                     [](char c) { return c == '_' || absl::ascii_isalnum(static_cast<unsigned char>(c)); });
}

}  // namespace drover::study
