#include "link/duration.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdint>

#include "absl/strings/numbers.h"
#include "absl/strings/str_cat.h"
#include "absl/strings/str_format.h"
#include "link/text.h"

namespace drover::link {
namespace {

constexpr std::int64_t kMostSeconds = 315'576'000'000;  // 10,000 years: what the message may hold

absl::Status unreadable(std::string_view text) {
  return absl::InvalidArgumentError(
      absl::StrCat("\"", printable(text),
                   "\" is no span of time; write a number with its unit (ms, s, m, h, d), "
                   "as in 90s, 1h30m or 1.5d"));
}

bool in_number(char c) { return (c >= '0' && c <= '9') || c == '.'; }

// Zero where `unit` is none.
absl::Duration unit_named(std::string_view unit) {
  if (unit == "ms") return absl::Milliseconds(1);
  if (unit == "s") return absl::Seconds(1);
  if (unit == "m") return absl::Minutes(1);
  if (unit == "h") return absl::Hours(1);
  if (unit == "d") return absl::Hours(24);
  return absl::ZeroDuration();
}

std::string two_units(std::int64_t seconds) {
  struct Unit {
    std::int64_t seconds;
    const char* name;
  };
  constexpr std::array<Unit, 4> kUnits = {{{86400, "d"}, {3600, "h"}, {60, "min"}, {1, "s"}}};
  std::size_t i = 0;
  while (i + 1 < kUnits.size() && seconds < kUnits[i].seconds) ++i;
  if (i + 1 == kUnits.size()) return absl::StrCat(seconds, " s");
  // Rounded to the smaller of the two, which may carry into the larger or into the one above it.
  const std::int64_t small = kUnits[i + 1].seconds;
  seconds = (seconds + small / 2) / small * small;
  if (i > 0 && seconds >= kUnits[i - 1].seconds) --i;
  std::string text = absl::StrCat(seconds / kUnits[i].seconds, " ", kUnits[i].name);
  const std::int64_t rest = seconds % kUnits[i].seconds / kUnits[i + 1].seconds;
  if (rest > 0) absl::StrAppend(&text, " ", rest, " ", kUnits[i + 1].name);
  return text;
}

}  // namespace

absl::StatusOr<absl::Duration> parse_duration(std::string_view text) {
  absl::Duration sum = absl::ZeroDuration();
  std::string_view rest = text;
  if (rest.empty()) return unreadable(text);
  while (!rest.empty()) {
    const auto digits = static_cast<std::size_t>(std::find_if_not(rest.begin(), rest.end(), in_number) - rest.begin());
    double number = 0;
    if (digits == 0 || !absl::SimpleAtod({rest.data(), digits}, &number)) return unreadable(text);
    rest.remove_prefix(digits);
    const auto letters = static_cast<std::size_t>(std::find_if(rest.begin(), rest.end(), in_number) - rest.begin());
    const absl::Duration unit = unit_named(rest.substr(0, letters));
    if (unit == absl::ZeroDuration()) return unreadable(text);
    rest.remove_prefix(letters);
    sum += number * unit;
  }
  if (sum >= absl::Seconds(kMostSeconds)) return unreadable(text);
  return sum;
}

google::protobuf::Duration to_proto(absl::Duration span) {
  span = std::clamp(span, absl::Seconds(-kMostSeconds), absl::Seconds(kMostSeconds));
  google::protobuf::Duration made;
  absl::Duration rest;
  made.set_seconds(absl::IDivDuration(span, absl::Seconds(1), &rest));
  made.set_nanos(static_cast<std::int32_t>(absl::ToInt64Nanoseconds(rest)));
  return made;
}

absl::Duration from_proto(const google::protobuf::Duration& span) {
  return absl::Seconds(span.seconds()) + absl::Nanoseconds(span.nanos());
}

std::string human(absl::Duration span) {
  if (span == absl::InfiniteDuration()) return "endless";
  if (span < absl::ZeroDuration()) return absl::StrCat("-", human(-span));
  const double seconds = absl::ToDoubleSeconds(span);
  if (seconds == 0) return "0 s";
  if (seconds < 0.00995) return absl::StrFormat("%.2g ms", std::max(seconds * 1000, 0.01));
  if (seconds < 0.9995) return absl::StrFormat("%.0f ms", seconds * 1000);
  if (seconds < 9.95) return absl::StrFormat("%.2g s", seconds);
  return two_units(static_cast<std::int64_t>(std::llround(seconds)));
}

}  // namespace drover::link
