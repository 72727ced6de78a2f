#include "link/duration.h"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <cstdio>
#include <utility>

#include "absl/strings/str_cat.h"

namespace drover::link {
namespace {

constexpr absl::Duration kDay = absl::Hours(24);
constexpr absl::Duration kLongest = absl::Hours(24 * 3'652'425);  // 10,000 years

absl::Status malformed(std::string_view text) {
  return absl::InvalidArgumentError(
      absl::StrCat("\"", std::string(text), "\" is no span of time; write it as \"90s\", \"2h\" or \"1h30m\""));
}

// Takes the unit at the beginning of `rest` off; zero: there is none.
absl::Duration take_unit(std::string_view& rest) {
  static constexpr std::array<std::pair<std::string_view, absl::Duration>, 5> kUnits = {
      {{"ms", absl::Milliseconds(1)}, {"s", absl::Seconds(1)}, {"m", absl::Minutes(1)}, {"h", absl::Hours(1)}, {"d", kDay}}};
  for (const auto& [word, unit] : kUnits) {
    if (rest.substr(0, word.size()) != word) continue;
    rest.remove_prefix(word.size());
    return unit;
  }
  return absl::ZeroDuration();
}

std::string short_number(double value) {
  std::array<char, 32> text{};
  std::snprintf(text.data(), text.size(), value < 9.95 ? "%.1f" : "%.0f", value);
  std::string shown = text.data();
  if (shown.size() > 2 && shown.substr(shown.size() - 2) == ".0") shown.resize(shown.size() - 2);
  return shown;
}

std::string two_units(std::int64_t large, const char* large_unit, std::int64_t small, const char* small_unit) {
  if (small == 0) return absl::StrCat(large, " ", large_unit);
  return absl::StrCat(large, " ", large_unit, " ", small, " ", small_unit);
}

}  // namespace

absl::StatusOr<absl::Duration> parse_duration(std::string_view text) {
  absl::Duration span = absl::ZeroDuration();
  if (text.empty()) return malformed(text);
  for (std::string_view rest = text; !rest.empty();) {
    double number = 0.0;
    const char* const end = rest.data() + rest.size();
    const auto [stop, error] = std::from_chars(rest.data(), end, number, std::chars_format::fixed);
    if (error != std::errc() || !std::isfinite(number) || std::signbit(number)) return malformed(text);
    rest.remove_prefix(static_cast<std::size_t>(stop - rest.data()));
    const absl::Duration unit = take_unit(rest);
    if (unit == absl::ZeroDuration()) return malformed(text);
    span += unit * number;
    if (span > kLongest) return malformed(text);
  }
  return span;
}

google::protobuf::Duration to_proto(absl::Duration span) {
  span = std::clamp(span, -kLongest, kLongest);
  google::protobuf::Duration made;
  made.set_seconds(absl::IDivDuration(span, absl::Seconds(1), &span));
  made.set_nanos(static_cast<std::int32_t>(absl::IDivDuration(span, absl::Nanoseconds(1), &span)));
  return made;
}

absl::Duration from_proto(const google::protobuf::Duration& span) {
  return absl::Seconds(span.seconds()) + absl::Nanoseconds(span.nanos());
}

std::string human(absl::Duration span) {
  if (span < absl::ZeroDuration()) return absl::StrCat("-", human(-span));
  if (span == absl::InfiniteDuration()) return "for ever";
  if (span < absl::Milliseconds(999.5)) {
    return absl::StrCat(static_cast<std::int64_t>(std::llround(absl::ToDoubleMilliseconds(span))), " ms");
  }
  if (span < absl::Seconds(59.5)) return absl::StrCat(short_number(absl::ToDoubleSeconds(span)), " s");
  const auto seconds = static_cast<std::int64_t>(std::llround(absl::ToDoubleSeconds(span)));
  if (seconds < 3'600) return two_units(seconds / 60, "min", seconds % 60, "s");
  const std::int64_t minutes = (seconds + 30) / 60;
  if (minutes < 24 * 60) return two_units(minutes / 60, "h", minutes % 60, "min");
  const std::int64_t hours = (minutes + 30) / 60;
  return two_units(hours / 24, "d", hours % 24, "h");
}

}  // namespace drover::link
