// A text with marks that values take the place of: `DIAMETER  [=diameter=]  METRES`.
#pragma once

#include <map>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "absl/status/statusor.h"
#include "drover/v1/study.pb.h"

namespace drover::code {

// How a number is written.
struct Format {
  std::string conversion;  // one printf conversion of d i e E f F g G with flags, width and precision; empty: shortest
  int width = 0;           // the text must not be longer; 0: any
};

// INVALID_ARGUMENT unless `conversion` is exactly one allowed conversion.
absl::Status check_format(const Format& format);

// The number as text, the same in every locale. Without a conversion: the shortest text that reads back as the same
// number. OUT_OF_RANGE: longer than the width, or no whole number for d and i.
absl::StatusOr<std::string> format_number(double value, const Format& format);

// Parsed once, rendered for every run. Immutable; thread-safe.
class Template {
 public:
  struct Marks {
    std::string open = "[=", close = "=]";
  };
  // INVALID_ARGUMENT with 'line N, column M: ...': a mark without its end, or an empty name.
  static absl::StatusOr<Template> parse(std::string_view text, const Marks& marks,
                                        std::map<std::string, Format> formats);

  // Names in the order of their first use.
  const std::vector<std::string>& names() const { return names_; }
  // Line and column (1-based) of a name's first mark.
  std::pair<int, int> place_of(const std::string& name) const;

  // One pass: a value's text is never looked through for marks. `texts` replaces choices by what the deck calls them.
  // NOT_FOUND: a name without a value; OUT_OF_RANGE: a value that does not fit its width.
  absl::StatusOr<std::string> render(const std::map<std::string, v1::NamedValue>& values,
                                     const std::map<std::string, std::map<std::string, std::string>>& texts) const;

 private:
  struct Piece {
    std::string text;  // literal, or
    std::string name;  // of a value
    int line = 0, column = 0;
  };
  std::vector<Piece> pieces_;
  std::vector<std::string> names_;
  std::map<std::string, Format> formats_;
};

}  // namespace drover::code
