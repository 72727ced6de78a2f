#include "code/template.h"

#include <locale.h>

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <utility>

#include "absl/strings/str_cat.h"
#include "status/try.h"

namespace drover::code {
namespace {

constexpr int kMostWidth = 1000;
constexpr int kMostPrecision = 100;

// One printf conversion, taken apart: only what is known to be harmless is ever handed to printf.
struct Conversion {
  std::string flags;
  int width = 0;
  int precision = -1;
  char letter = 'g';
};

absl::Status malformed(const std::string& text) {
  return absl::InvalidArgumentError(
      absl::StrCat("format \"", text, "\" is not one conversion of d, i, e, E, f, F, g or G, as \"%12.5e\""));
}

absl::StatusOr<Conversion> parse_conversion(const std::string& text) {
  Conversion made;
  std::size_t at = 0;
  if (text.empty() || text[at++] != '%') return malformed(text);
  while (at < text.size() && std::string_view("-+ 0#").find(text[at]) != std::string_view::npos)
    made.flags += text[at++];
  const auto number = [&](int& value, int most) {
    const char* const first = text.data() + at;
    const auto [end, error] = std::from_chars(first, text.data() + text.size(), value);
    at += static_cast<std::size_t>(end - first);
    return (end == first || error == std::errc()) && value <= most;
  };
  if (!number(made.width, kMostWidth)) return malformed(text);
  if (at < text.size() && text[at] == '.') {
    ++at;
    made.precision = 0;
    if (!number(made.precision, kMostPrecision)) return malformed(text);
  }
  if (at + 1 != text.size() || std::string_view("dieEfFgG").find(text[at]) == std::string_view::npos) {
    return malformed(text);
  }
  made.letter = text[at];
  return made;
}

// printf with a decimal point, whatever the process's locale is.
class PlainLocale {
 public:
  PlainLocale() : plain_(newlocale(LC_ALL_MASK, "C", nullptr)), before_(uselocale(plain_)) {}
  ~PlainLocale() {
    uselocale(before_);
    freelocale(plain_);
  }
  PlainLocale(const PlainLocale&) = delete;
  PlainLocale& operator=(const PlainLocale&) = delete;

 private:
  locale_t plain_, before_;
};

absl::StatusOr<std::string> print(double value, const Conversion& conversion) {
  const bool whole = conversion.letter == 'd' || conversion.letter == 'i';
  std::string format = absl::StrCat("%", conversion.flags);
  if (conversion.width > 0) absl::StrAppend(&format, conversion.width);
  if (conversion.precision >= 0) absl::StrAppend(&format, ".", conversion.precision);
  absl::StrAppend(&format, whole ? "lld" : std::string(1, conversion.letter));
  std::array<char, 2048> text{};
  const PlainLocale locale;
#pragma GCC diagnostic push
#pragma GCC diagnostic ignored "-Wformat-nonliteral"
  if (!whole) {
    std::snprintf(text.data(), text.size(), format.c_str(), value);
    return std::string(text.data());
  }
  if (value != std::floor(value) || std::abs(value) > 9.0e15) {
    return absl::OutOfRangeError(absl::StrCat(value, " is no whole number, which format \"", format, "\" writes"));
  }
  std::snprintf(text.data(), text.size(), format.c_str(), static_cast<long long>(value));
#pragma GCC diagnostic pop
  return std::string(text.data());
}

std::string shortest(double value) {
  std::array<char, 64> text{};
  const auto [end, error] = std::to_chars(text.data(), text.data() + text.size(), value);
  return std::string(text.data(), end);
}

// Line and column of a place in a text, both 1-based.
std::pair<int, int> place(std::string_view text, std::size_t at) {
  const std::string_view before = text.substr(0, at);
  const auto line = static_cast<int>(std::count(before.begin(), before.end(), '\n')) + 1;
  const std::size_t begin = before.rfind('\n');
  return {line, static_cast<int>(begin == std::string_view::npos ? at : at - begin - 1) + 1};
}

std::string_view trimmed(std::string_view text) {
  while (!text.empty() && (text.front() == ' ' || text.front() == '\t')) text.remove_prefix(1);
  while (!text.empty() && (text.back() == ' ' || text.back() == '\t')) text.remove_suffix(1);
  return text;
}

}  // namespace

absl::Status check_format(const Format& format) {
  if (format.width < 0 || format.width > kMostWidth) {
    return absl::InvalidArgumentError(absl::StrCat("width ", format.width, " is not between 1 and ", kMostWidth));
  }
  return format.conversion.empty() ? absl::OkStatus() : parse_conversion(format.conversion).status();
}

absl::StatusOr<std::string> format_number(double value, const Format& format) {
  std::string text = shortest(value);
  if (!format.conversion.empty()) {
    DROVER_ASSIGN(const Conversion conversion, parse_conversion(format.conversion));
    DROVER_ASSIGN(text, print(value, conversion));
  }
  if (format.width > 0 && text.size() > static_cast<std::size_t>(format.width)) {
    return absl::OutOfRangeError(
        absl::StrCat("\"", text, "\" has ", text.size(), " characters, its field has ", format.width));
  }
  return text;
}

absl::StatusOr<Template> Template::parse(std::string_view text, const Marks& marks,
                                         std::map<std::string, Format> formats) {
  Template made;
  made.formats_ = std::move(formats);
  std::size_t at = 0;
  while (at < text.size()) {
    const std::size_t open = text.find(marks.open, at);
    if (open == std::string_view::npos) break;
    if (open > at) made.pieces_.push_back({.text = std::string(text.substr(at, open - at))});
    const auto [line, column] = place(text, open);
    const std::size_t first = open + marks.open.size();
    const std::size_t close = text.find(marks.close, first);
    const std::string_view name = close == std::string_view::npos ? "" : trimmed(text.substr(first, close - first));
    if (name.empty() || name.find('\n') != std::string_view::npos) {
      return absl::InvalidArgumentError(absl::StrCat("line ", line, ", column ", column, ": ", marks.open,
                                                     " without a name and ", marks.close, " after it"));
    }
    made.pieces_.push_back({.name = std::string(name), .line = line, .column = column});
    if (std::find(made.names_.begin(), made.names_.end(), name) == made.names_.end()) made.names_.emplace_back(name);
    at = close + marks.close.size();
  }
  if (at < text.size()) made.pieces_.push_back({.text = std::string(text.substr(at))});
  return made;
}

std::pair<int, int> Template::place_of(const std::string& name) const {
  const auto at = std::find_if(pieces_.begin(), pieces_.end(), [&](const Piece& piece) { return piece.name == name; });
  return at == pieces_.end() ? std::pair(0, 0) : std::pair(at->line, at->column);
}

absl::StatusOr<std::string> Template::render(
    const std::map<std::string, v1::NamedValue>& values,
    const std::map<std::string, std::map<std::string, std::string>>& texts) const {
  std::string made;
  for (const Piece& piece : pieces_) {
    if (piece.name.empty()) {
      made += piece.text;
      continue;
    }
    const auto value = values.find(piece.name);
    if (value == values.end()) return absl::NotFoundError(absl::StrCat("there is no value for ", piece.name));
    const auto found = formats_.find(piece.name);
    const Format format = found == formats_.end() ? Format{} : found->second;
    if (!value->second.has_text()) {
      const absl::StatusOr<std::string> text = format_number(value->second.number(), format);
      if (!text.ok()) return absl::OutOfRangeError(absl::StrCat(piece.name, ": ", text.status().message()));
      made += *text;
      continue;
    }
    std::string text = value->second.text();
    if (const auto named = texts.find(piece.name); named != texts.end()) {
      if (const auto choice = named->second.find(text); choice != named->second.end()) text = choice->second;
    }
    if (format.width > 0 && text.size() > static_cast<std::size_t>(format.width)) {
      return absl::OutOfRangeError(
          absl::StrCat(piece.name, ": \"", text, "\" is longer than its field of ", format.width));
    }
    made += text;
  }
  return made;
}

}  // namespace drover::code
