#include "code/number.h"

#include <cctype>
#include <charconv>
#include <cmath>
#include <limits>
#include <optional>
#include <string>

#include "absl/status/status.h"
#include "absl/strings/str_cat.h"

namespace drover::code {
namespace {

bool is_digit(char c) { return c >= '0' && c <= '9'; }

std::string lower(std::string_view text) {
  std::string made(text);
  for (char& c : made) c = static_cast<char>(std::tolower(static_cast<unsigned char>(c)));
  return made;
}

// NaN and infinity as C, Fortran and Python write them.
std::optional<ReadNumber> special(std::string_view text, std::size_t sign) {
  const bool negative = sign == 1 && text.front() == '-';
  const std::string word = lower(text.substr(sign, 8));
  const double infinity = std::numeric_limits<double>::infinity();
  if (word == "infinity") return ReadNumber{negative ? -infinity : infinity, sign + 8};
  if (word.substr(0, 3) == "inf") return ReadNumber{negative ? -infinity : infinity, sign + 3};
  if (word.substr(0, 3) == "nan") return ReadNumber{std::numeric_limits<double>::quiet_NaN(), sign + 3};
  return std::nullopt;
}

// The length of digits with at most one point at the beginning of `text`; 0: there is no digit.
std::size_t mantissa_length(std::string_view text) {
  std::size_t length = 0;
  bool point = false, digit = false;
  for (; length < text.size(); ++length) {
    if (is_digit(text[length])) {
      digit = true;
    } else if (text[length] == '.' && !point) {
      point = true;
    } else {
      break;
    }
  }
  return digit ? length : 0;
}

struct Exponent {
  std::string digits;      // with sign
  std::size_t length = 0;  // 0: there is none
};

// E, D or Q (Fortran's kinds) with digits, or a sign alone with digits: Fortran drops the letter of three-digit ones.
Exponent exponent(std::string_view rest) {
  std::size_t at = 0;
  if (at < rest.size() && std::string_view("eEdDqQ").find(rest[at]) != std::string_view::npos) ++at;
  const bool letter = at == 1;
  std::string digits;
  const bool sign = at < rest.size() && (rest[at] == '+' || rest[at] == '-');
  if (sign) {
    if (rest[at] == '-') digits.push_back('-');
    ++at;
  }
  const std::size_t first = at;
  while (at < rest.size() && is_digit(rest[at])) digits.push_back(rest[at++]);
  const std::size_t count = at - first;
  if (count == 0 || (!letter && (!sign || count != 3))) return {};
  return {digits, at};
}

}  // namespace

absl::StatusOr<ReadNumber> read_number(std::string_view text) {
  if (!text.empty() && text.front() == '*') {
    return absl::OutOfRangeError("asterisks stand there: the number did not fit its field");
  }
  const std::size_t sign = !text.empty() && (text.front() == '+' || text.front() == '-') ? 1 : 0;
  const std::size_t mantissa = mantissa_length(text.substr(sign));
  if (mantissa == 0) {
    if (const std::optional<ReadNumber> read = special(text, sign)) return *read;
    return absl::InvalidArgumentError("no number stands there");
  }
  const Exponent power = exponent(text.substr(sign + mantissa));
  std::string plain(text.substr(0, sign) == "-" ? "-" : "");
  plain += text.substr(sign, mantissa);
  if (power.length > 0) plain += "e" + power.digits;
  ReadNumber read{0.0, sign + mantissa + power.length};
  const auto [end, error] = std::from_chars(plain.data(), plain.data() + plain.size(), read.value);
  if (error == std::errc::result_out_of_range) {
    // Too large is infinite; too small is 0, as every code means it.
    const bool small = !power.digits.empty() && power.digits.front() == '-';
    read.value = small ? 0.0 : std::numeric_limits<double>::infinity();
    if (plain.front() == '-') read.value = -read.value;
  } else if (error != std::errc() || end != plain.data() + plain.size()) {
    return absl::InvalidArgumentError("no number stands there");
  }
  return read;
}

}  // namespace drover::code
