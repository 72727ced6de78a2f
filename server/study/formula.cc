#include "study/formula.h"

#include <muParser.h>

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <exception>
#include <mutex>
#include <optional>
#include <set>
#include <utility>

#include "absl/strings/ascii.h"
#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "study/limits.h"
#include "study/names.h"
#include "study/wording.h"

namespace drover::study {
namespace {

constexpr absl::string_view kUnknownName = "drover/unknown-name";

absl::Status wrong(absl::string_view why) { return absl::InvalidArgumentError(why); }

// What the parser would accept and we do not: assignments, which would write into our variables, and texts.
std::optional<absl::Status> forbidden(std::string_view text) {
  for (std::size_t i = 0; i < text.size(); ++i) {
    const char c = text[i];
    const char before = i > 0 ? text[i - 1] : ' ';
    const char after = i + 1 < text.size() ? text[i + 1] : ' ';
    const bool compared = before == '=' || before == '<' || before == '>' || before == '!' || after == '=';
    if (c == '=' && !compared) {
      return wrong(absl::StrCat("a formula assigns nothing (character ", i + 1, "); to compare, write =="));
    }
    const bool control = absl::ascii_iscntrl(static_cast<unsigned char>(c)) && !absl::ascii_isspace(c);
    if (c == '"' || control) {
      return wrong(absl::StrCat("character ", i + 1, " cannot be in a formula"));
    }
  }
  return std::nullopt;
}

absl::Status check_shape(std::string_view text) {
  if (text.size() > kMostFormulaLength) {
    return wrong(absl::StrCat("the formula has ", text.size(), " characters; at most ", kMostFormulaLength));
  }
  if (absl::StripAsciiWhitespace(absl::string_view(text.data(), text.size())).empty()) {
    return wrong("the formula is empty");
  }
  int depth = 0;
  for (const char c : text) {
    depth += c == '(' ? 1 : c == ')' ? -1 : 0;
    if (depth > kMostFormulaDepth) {
      return wrong(absl::StrCat("parentheses are nested deeper than ", kMostFormulaDepth));
    }
  }
  return forbidden(text).value_or(absl::OkStatus());
}

// The parser's own sentence, with the place counted from 1 and the message's own count from 0 taken off.
absl::Status in_words(const mu::ParserError& error) {
  std::string message = error.GetMsg();
  for (const std::string_view tail : {" found at position", " at position", " at expression position", " (position:"}) {
    const std::size_t at = message.find(tail);
    if (at != std::string::npos) message.resize(at);
  }
  while (!message.empty() && message.back() == '.') message.pop_back();
  message = printable(message, 200);
  if (error.GetCode() == mu::ecUNEXPECTED_EOF) return wrong("the formula ends too early");
  if (error.GetPos() < 0) return wrong(message);
  return wrong(absl::StrCat(message, " (character ", error.GetPos() + 1, ")"));
}

absl::Status unknown(const std::string& name, std::size_t position, std::span<const std::string> known) {
  std::string message = absl::StrCat(quoted(name), " is not known");
  if (position > 0) absl::StrAppend(&message, " (character ", position, ")");
  const std::string near = nearest(name, known);
  if (!near.empty()) absl::StrAppend(&message, "; did you mean ", quoted(near), "?");
  absl::Status status = wrong(message);
  status.SetPayload(kUnknownName, absl::Cord(name));
  return status;
}

struct Word {
  std::string name;
  std::size_t position;  // 1-based
  bool called;           // an opening parenthesis follows
};

// The identifiers of a formula, in order. Numbers such as 1e5 are none.
std::vector<Word> words(std::string_view text) {
  const auto part = [](char c) { return c == '_' || absl::ascii_isalnum(static_cast<unsigned char>(c)); };
  std::vector<Word> found;
  for (std::size_t i = 0; i < text.size();) {
    if (!part(text[i])) {
      ++i;
      continue;
    }
    std::size_t end = i;
    while (end < text.size() && part(text[end])) ++end;
    const bool number = absl::ascii_isdigit(static_cast<unsigned char>(text[i])) || (i > 0 && text[i - 1] == '.');
    std::size_t next = end;
    while (next < text.size() && absl::ascii_isspace(static_cast<unsigned char>(text[next]))) ++next;
    const bool called = next < text.size() && text[next] == '(';
    if (!number) found.push_back({std::string(text.substr(i, end - i)), i + 1, called});
    i = end;
  }
  return found;
}

}  // namespace

struct Formula::Parts {
  mu::Parser parser;
  std::vector<double> bound;  // one a known name; the parser holds addresses into it
  std::vector<std::string> used;
  mutable std::mutex mutex;

  absl::Status bind(std::string_view text, std::span<const std::string> known);
  absl::Status name_unknown(std::string_view text, std::span<const std::string> known) const;
  absl::Status read(std::string_view text);
};

absl::Status Formula::Parts::bind(std::string_view text, std::span<const std::string> known) {
  bound.assign(known.size(), 1.0);
  std::set<std::string> there;
  for (Word& word : words(text)) there.insert(std::move(word.name));
  try {
    for (std::size_t i = 0; i < known.size(); ++i) {
      if (!there.contains(known[i])) continue;  // a study may know thousands of names
      const bool usable = is_identifier(known[i]) && known[i].size() < kMostNameLength;
      if (usable && !parser.GetConst().contains(known[i])) parser.DefineVar(known[i], &bound[i]);
    }
    parser.SetExpr(std::string(text));
    return absl::OkStatus();
  } catch (const mu::ParserError& error) {
    return in_words(error);
  } catch (const std::exception& error) {
    return wrong(error.what());
  }
}

// Said first, since what the parser makes of a misspelt name is often about something else.
absl::Status Formula::Parts::name_unknown(std::string_view text, std::span<const std::string> known) const {
  std::vector<std::string> functions;
  for (const auto& [name, callback] : parser.GetFunDef()) functions.push_back(name);
  for (const Word& word : words(text)) {
    const bool function = parser.GetFunDef().contains(word.name);
    const bool value = parser.GetVar().contains(word.name) || parser.GetConst().contains(word.name);
    if (word.called ? function || value : value) continue;
    if (function) {
      return wrong(absl::StrCat("the function \"", word.name, "\" needs its arguments in parentheses (character ",
                                word.position, ")"));
    }
    return unknown(word.name, word.position, word.called ? std::span<const std::string>(functions) : known);
  }
  return absl::OkStatus();
}

absl::Status Formula::Parts::read(std::string_view text) {
  try {
    for (const auto& [name, address] : parser.GetUsedVar()) used.push_back(name);
    int count = 0;
    parser.Eval(count);
    if (count != 1)
      return wrong(absl::StrCat("the formula has ", count, " values, separated by commas; one is wanted"));
    return absl::OkStatus();
  } catch (const mu::ParserError& error) {
    return in_words(error);
  } catch (const std::exception& error) {
    return wrong(absl::StrCat(error.what(), " in ", quoted(text)));
  }
}

Formula::Formula(std::unique_ptr<Parts> parts) : parts_(std::move(parts)) {}
Formula::Formula(Formula&&) noexcept = default;
Formula& Formula::operator=(Formula&&) noexcept = default;
Formula::~Formula() = default;

absl::StatusOr<Formula> Formula::compile(std::string_view text, std::span<const std::string> known) {
  DROVER_TRY(check_shape(text));
  auto parts = std::make_unique<Parts>();
  DROVER_TRY(parts->bind(text, known));
  DROVER_TRY(parts->name_unknown(text, known));
  DROVER_TRY(parts->read(text));
  return Formula(std::move(parts));
}

const std::vector<std::string>& Formula::names_used() const { return parts_->used; }

absl::StatusOr<double> Formula::evaluate(std::span<const double> values) const {
  Parts& parts = *parts_;
  const std::lock_guard lock(parts.mutex);
  if (values.size() != parts.bound.size()) {
    return wrong(absl::StrCat(values.size(), " values for ", parts.bound.size(), " names"));
  }
  std::copy(values.begin(), values.end(), parts.bound.begin());
  double result = 0.0;
  try {
    result = parts.parser.Eval();
  } catch (const mu::ParserError& error) {
    return in_words(error);
  } catch (const std::exception& error) {
    return wrong(error.what());
  }
  if (std::isnan(result)) return absl::OutOfRangeError("the formula gives no number");
  if (std::isinf(result)) return absl::OutOfRangeError("the formula gives an infinite number");
  return result;
}

std::string Formula::unknown_name(const absl::Status& status) {
  const auto payload = status.GetPayload(kUnknownName);
  return payload.has_value() ? std::string(*payload) : "";
}

}  // namespace drover::study
