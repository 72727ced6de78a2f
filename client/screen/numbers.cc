#include "screen/numbers.h"

#include <array>
#include <charconv>
#include <cmath>
#include <cstdio>

#include "absl/strings/str_cat.h"
#include "link/duration.h"
#include "link/text.h"

namespace drover::screen {

std::string number(double value, int digits) {
  std::array<char, 64> buffer;
  std::snprintf(buffer.data(), buffer.size(), "%.*g", digits, value);
  return buffer.data();
}

std::string exact(double value) {
  std::array<char, 64> buffer;
  const auto end = std::to_chars(buffer.data(), buffer.data() + buffer.size(), value).ptr;
  return {buffer.data(), end};
}

std::string whole(std::int64_t value) {
  std::string digits = std::to_string(value);
  const int first = value < 0 ? 1 : 0;
  for (int at = static_cast<int>(digits.size()) - 3; at > first; at -= 3)
    digits.insert(static_cast<std::size_t>(at), ",");
  return digits;
}

std::string counted(std::int64_t count, const std::string& one, const std::string& many) {
  return absl::StrCat(whole(count), " ", count == 1 ? one : many);
}

std::string bare(const v1::NamedValue& named, int digits) {
  if (named.value_case() == v1::NamedValue::kText) return link::printable(named.text());
  if (named.value_case() == v1::NamedValue::kNumber) return number(named.number(), digits);
  return "-";
}

std::string value(const v1::NamedValue& named, int digits) {
  const std::string text = bare(named, digits);
  return named.unit().empty() ? text : absl::StrCat(text, " ", link::printable(named.unit()));
}

std::string about(absl::Duration span) {
  absl::Duration grain = absl::Seconds(1);
  if (span >= absl::Minutes(2)) grain = absl::Minutes(1);
  if (span >= absl::Hours(1)) grain = absl::Minutes(10);
  if (span >= absl::Hours(24)) grain = absl::Hours(1);
  const absl::Duration rounded = absl::Floor(span + grain / 2, grain);
  return absl::StrCat("about ", link::human(std::max(rounded, grain)));
}

}  // namespace drover::screen
