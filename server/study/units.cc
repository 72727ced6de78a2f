#include "study/units.h"

#include <udunits2.h>

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <limits>
#include <mutex>
#include <optional>

#include "absl/strings/ascii.h"
#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "study/limits.h"
#include "study/wording.h"

namespace drover::study {
namespace {

struct FreeUnit {
  void operator()(ut_unit* unit) const { ut_free(unit); }
};
struct FreeConverter {
  void operator()(cv_converter* converter) const { cv_free(converter); }
};
using UnitPtr = std::unique_ptr<ut_unit, FreeUnit>;
using ConverterPtr = std::unique_ptr<cv_converter, FreeConverter>;

constexpr double kEpsilon = std::numeric_limits<double>::epsilon();
// Far enough out that an offset leaves no trace in the slope, and a power of two so that dividing is exact.
constexpr double kFar = 1099511627776.0;  // 2^40

struct Snap {
  int digits;
  double tolerance;  // relative
};
// udunits multiplies its way through base units, so 1 bar comes out as 0.09999999999999999 MPa: a few roundings.
constexpr Snap kScaleSnap{.digits = 12, .tolerance = 4 * kEpsilon};
// Offsets are differences of larger numbers (0 degC is 31.99999999999994 degF) and lose more digits.
constexpr Snap kOffsetSnap{.digits = 9, .tolerance = 1e-12};

// The number of so few digits that lies within the tolerance of `value`, else `value`.
double snapped(double value, Snap snap) {
  std::array<char, 40> text{};
  const auto written =
      std::to_chars(text.data(), text.data() + text.size(), value, std::chars_format::scientific, snap.digits - 1);
  double rounded = 0.0;
  std::from_chars(text.data(), written.ptr, rounded);
  return std::abs(rounded - value) <= snap.tolerance * std::abs(value) ? rounded : value;
}

struct Line {
  double scale;
  double offset;
};

// What the two directions say together. An inch is exactly 0.0254 m and 0 degC are exactly 32 degF; the way back is
// best taken from such numbers.
Conversion joined(const Line& there, const Line& back) {
  double scale = snapped(there.scale, kScaleSnap);
  const double back_scale = snapped(back.scale, kScaleSnap);
  if (scale == there.scale && back_scale != back.scale) scale = 1.0 / back_scale;
  double offset = snapped(there.offset, kOffsetSnap);
  const double back_offset = snapped(back.offset, kOffsetSnap);
  if (offset == there.offset && back_offset != back.offset) offset = -scale * back_offset;
  return Conversion{.scale = scale, .offset = offset};
}

// Nothing where the conversion is no straight line (decibels, or a time into a frequency).
std::optional<Line> measured(const cv_converter* converter) {
  const double offset = cv_convert_double(converter, 0.0);
  const double scale = (cv_convert_double(converter, kFar) - offset) / kFar;
  const bool finite = std::isfinite(offset) && std::isfinite(scale) && scale != 0.0;
  for (const double x : {1.0, -3.0, 1000.0}) {
    const double y = cv_convert_double(converter, x);
    const double expected = scale * x + offset;
    const double size = std::abs(scale * x) + std::abs(offset);
    if (!finite || !(std::abs(y - expected) <= 1e-12 * size)) {
      return std::nullopt;
    }
  }
  return Line{scale, offset};
}

absl::Status no_match(std::string_view from, std::string_view to) {
  return absl::InvalidArgumentError(absl::StrCat("unit ", quoted(from), " does not match ", quoted(to)));
}

}  // namespace

struct Units::Database {
  mutable std::mutex mutex;
  ut_system* system = nullptr;

  // The caller holds the mutex.
  absl::StatusOr<UnitPtr> parse(std::string_view text) const;
};

absl::StatusOr<UnitPtr> Units::Database::parse(std::string_view text) const {
  if (system == nullptr) return absl::FailedPreconditionError("the udunits database cannot be read");
  if (text.size() > kMostUnitLength) {
    return absl::InvalidArgumentError(
        absl::StrCat("unit ", quoted(text), " has more than ", kMostUnitLength, " bytes"));
  }
  // udunits reads a C string and would stop at a zero byte.
  const bool printable =
      std::none_of(text.begin(), text.end(), [](char c) { return absl::ascii_iscntrl(static_cast<unsigned char>(c)); });
  const std::string trimmed(absl::StripAsciiWhitespace(absl::string_view(text.data(), text.size())));
  UnitPtr unit(printable ? ut_parse(system, trimmed.c_str(), UT_UTF8) : nullptr);
  if (unit == nullptr) return absl::InvalidArgumentError(absl::StrCat("unit ", quoted(text), " is not known"));
  return unit;
}

Units::Units() : database_(new Database) {
  ut_set_error_message_handler(ut_ignore);
  database_->system = ut_read_xml(nullptr);
}

const Units& Units::shared() {
  static const Units* const units = new Units;
  return *units;
}

absl::Status Units::parse(std::string_view text) const {
  if (text.empty()) return absl::OkStatus();
  const std::lock_guard lock(database_->mutex);
  return database_->parse(text).status();
}

absl::StatusOr<Conversion> Units::conversion(std::string_view from, std::string_view to) const {
  if (from == to || from.empty() || to.empty()) return Conversion{};
  const std::lock_guard lock(database_->mutex);
  DROVER_ASSIGN(const UnitPtr source, database_->parse(from));
  DROVER_ASSIGN(const UnitPtr target, database_->parse(to));
  if (ut_are_convertible(source.get(), target.get()) == 0) return no_match(from, to);
  const ConverterPtr forth(ut_get_converter(source.get(), target.get()));
  const ConverterPtr back(ut_get_converter(target.get(), source.get()));
  if (forth == nullptr || back == nullptr) return no_match(from, to);
  const std::optional<Line> line = measured(forth.get());
  const std::optional<Line> inverse = measured(back.get());
  if (!line || !inverse) return no_match(from, to);
  return joined(*line, *inverse);
}

std::string Units::nearest_unit(std::string_view text) {
  static constexpr std::array<std::string_view, 46> kUsual = {
      "m",  "mm", "cm",  "km", "m2",   "m3",  "s",    "ms",   "min",    "h",     "d",   "kg",
      "g",  "t",  "N",   "kN", "MN",   "Pa",  "kPa",  "MPa",  "GPa",    "bar",   "J",   "kJ",
      "MJ", "W",  "kW",  "MW", "kW.h", "K",   "degC", "degF", "Hz",     "kHz",   "MHz", "GHz",
      "V",  "A",  "ohm", "F",  "H",    "m/s", "m3/s", "rpm",  "degree", "radian"};
  const auto lower = [](std::string_view unit) { return absl::AsciiStrToLower(std::string(unit)); };
  for (const std::string_view unit : kUsual) {
    if (lower(unit) == lower(text)) return std::string(unit);
  }
  // Products are the usual stumbling block: udunits wants a point or a space between the factors.
  if (text == "kWh") return "kW.h";
  if (text == "deg") return "degree";
  return "";
}

}  // namespace drover::study
