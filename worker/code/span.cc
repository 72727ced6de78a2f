#include "code/span.h"

#include <array>
#include <charconv>
#include <cmath>
#include <optional>
#include <utility>

namespace drover::code {
namespace {

constexpr double kLongest_s = 10'000.0 * 365.25 * 86'400.0;
constexpr double kLargest = 1e18;

using Unit = std::pair<std::string_view, double>;

// A number with one of the units at the beginning of `rest`, which is moved on.
template <std::size_t kCount>
std::optional<double> take(std::string_view& rest, const std::array<Unit, kCount>& units) {
  double number = 0.0;
  const auto [stop, error] = std::from_chars(rest.data(), rest.data() + rest.size(), number, std::chars_format::fixed);
  if (error != std::errc() || !std::isfinite(number) || std::signbit(number)) return std::nullopt;
  rest.remove_prefix(static_cast<std::size_t>(stop - rest.data()));
  for (const auto& [word, factor] : units) {
    if (rest.substr(0, word.size()) != word) continue;
    rest.remove_prefix(word.size());
    return number * factor;
  }
  return std::nullopt;
}

}  // namespace

absl::StatusOr<absl::Duration> parse_span(std::string_view text) {
  static constexpr std::array<Unit, 5> kUnits = {
      {{"ms", 1e-3}, {"s", 1.0}, {"m", 60.0}, {"h", 3600.0}, {"d", 86'400.0}}};
  double seconds = 0.0;
  bool any = false;
  for (std::string_view rest = text; !rest.empty(); any = true) {
    const std::optional<double> part = take(rest, kUnits);
    if (!part) return absl::InvalidArgumentError("no span of time");
    seconds += *part;
  }
  if (!any || seconds > kLongest_s) return absl::InvalidArgumentError("no span of time");
  return absl::Seconds(seconds);
}

absl::StatusOr<std::int64_t> parse_size(std::string_view text) {
  static constexpr std::array<Unit, 9> kUnits = {{{"KiB", 0x1p10},
                                                  {"MiB", 0x1p20},
                                                  {"GiB", 0x1p30},
                                                  {"TiB", 0x1p40},
                                                  {"kB", 1e3},
                                                  {"MB", 1e6},
                                                  {"GB", 1e9},
                                                  {"TB", 1e12},
                                                  {"", 1.0}}};
  std::string_view rest = text;
  const std::optional<double> bytes = take(rest, kUnits);
  if (!bytes || !rest.empty() || *bytes < 1.0 || *bytes > kLargest) return absl::InvalidArgumentError("no size");
  return static_cast<std::int64_t>(*bytes);
}

}  // namespace drover::code
