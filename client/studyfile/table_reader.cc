#include "studyfile/table_reader.h"

#include <algorithm>
#include <cmath>
#include <sstream>

#include "absl/strings/numbers.h"
#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "absl/time/civil_time.h"
#include "absl/time/time.h"
#include "studyfile/nearest.h"

namespace drover::studyfile {
namespace {

constexpr std::size_t kMostShown = 60;  // characters of a user's text in a message

std::string cut(std::string text) {
  if (text.size() <= kMostShown) return text;
  std::size_t end = kMostShown;
  while (end > 0 && (static_cast<unsigned char>(text[end]) & 0xC0) == 0x80) --end;  // not inside a character
  return text.substr(0, end) + "...";
}

// How to write the number that stands in quotes, else an example.
std::string number_advice(const std::string& key, const toml::node& node, const std::string& example) {
  double value = 0;
  const auto text = node.value<std::string>();
  if (node.is_string() && absl::SimpleAtod(*text, &value) && std::isfinite(value)) {
    return absl::StrCat("write it without quotes: ", key, " = ", *text);
  }
  return absl::StrCat("write ", example);
}

std::optional<google::protobuf::Timestamp> to_timestamp(const toml::date_time& when) {
  if (when.date.year < 1) return std::nullopt;
  const absl::CivilSecond civil(when.date.year, when.date.month, when.date.day, when.time.hour, when.time.minute,
                                when.time.second);
  const absl::Time time =
      absl::FromCivil(civil, absl::UTCTimeZone()) - absl::Minutes(static_cast<int>(when.offset->minutes));
  google::protobuf::Timestamp stamp;
  stamp.set_seconds(absl::ToUnixSeconds(time));
  stamp.set_nanos(static_cast<int>(when.time.nanosecond));
  return stamp;
}

}  // namespace

// --- Findings ---

void Findings::add(const toml::source_region& where, std::string field, std::string text, std::string advice,
                   std::string nearest) {
  const Place place{static_cast<int>(where.begin.line), static_cast<int>(where.begin.column)};
  complaints_.push_back({file_, place, std::move(field), std::move(text), std::move(advice), std::move(nearest)});
}

std::vector<Complaint> Findings::take() {
  sort_by_place(complaints_);
  return std::exchange(complaints_, {});
}

// --- words for messages ---

std::string quoted(std::string_view text) { return absl::StrCat("\"", cut(std::string(text)), "\""); }

std::string kind_of(const toml::node& node) {
  switch (node.type()) {
    case toml::node_type::table:
      return "a table";
    case toml::node_type::array:
      return "a list";
    case toml::node_type::string:
      return "a text";
    case toml::node_type::integer:
      return "an integer";
    case toml::node_type::floating_point:
      return "a number";
    case toml::node_type::boolean:
      return "a truth value";
    case toml::node_type::date:
      return "a date";
    case toml::node_type::time:
      return "a time";
    case toml::node_type::date_time:
      return "a date with a time";
    default:
      return "nothing";
  }
}

std::string shown(const toml::node& node) {
  std::ostringstream out;
  out << toml::node_view<const toml::node>(&node);
  return cut(std::move(out).str());
}

// --- TableReader ---

std::string TableReader::field(const std::string& key) const {
  return path_.empty() ? std::string(key) : absl::StrCat(path_, ".", key);
}

void TableReader::know(std::initializer_list<const char*> keys) {
  for (const char* const key : keys) {
    if (std::find(known_.begin(), known_.end(), key) == known_.end()) known_.emplace_back(key);
  }
}

const toml::node* TableReader::take(const std::string& key) {
  know({key.c_str()});
  return table_.get(std::string_view(key));
}

void TableReader::wrong_kind(const std::string& key, const toml::node& node, const std::string& wanted,
                             std::string advice) {
  findings_.add(node.source(), field(key),
                absl::StrCat(key, " in ", title_, " is ", kind_of(node), ", where ", wanted, " is wanted"),
                std::move(advice));
}

std::optional<std::string> TableReader::text(const std::string& key) {
  const toml::node* const node = take(key);
  if (node == nullptr) return std::nullopt;
  if (!node->is_string()) {
    const bool simple = node->is_number() || node->is_boolean();
    wrong_kind(key, *node, "a text",
               simple ? absl::StrCat("write it in quotes: ", key, " = \"", shown(*node), "\"")
                      : absl::StrCat("write ", key, " = \"...\""));
    return std::nullopt;
  }
  std::string value = *node->value<std::string>();
  if (value.empty()) {
    findings_.add(node->source(), field(key), absl::StrCat(key, " in ", title_, " is empty"),
                  absl::StrCat("write a text, or leave ", key, " out"));
    return std::nullopt;
  }
  return value;
}

std::optional<double> TableReader::number(const std::string& key) {
  const toml::node* const node = take(key);
  if (node == nullptr) return std::nullopt;
  if (!node->is_number()) {
    wrong_kind(key, *node, "a number", number_advice(key, *node, absl::StrCat("a number, such as ", key, " = 1.5")));
    return std::nullopt;
  }
  const double value = *node->value<double>();
  if (!std::isfinite(value)) {
    findings_.add(node->source(), field(key), absl::StrCat(key, " = ", shown(*node), " is no finite number"),
                  "write a finite one");
    return std::nullopt;
  }
  return value;
}

std::optional<std::int64_t> TableReader::integer(const std::string& key, std::int64_t least, std::int64_t most) {
  const toml::node* const node = take(key);
  if (node == nullptr) return std::nullopt;
  if (!node->is_integer()) {
    const std::string example = absl::StrCat("digits only, such as ", key, " = ", std::max<std::int64_t>(least, 1));
    wrong_kind(key, *node, "an integer", number_advice(key, *node, example));
    return std::nullopt;
  }
  const std::int64_t value = node->as_integer()->get();
  if (value >= least && value <= most) return value;
  const bool low = value < least;
  findings_.add(node->source(), field(key),
                absl::StrCat(key, " = ", value, low ? " is below " : " is above ", low ? least : most),
                absl::StrCat("write ", low ? least : most, low ? " or more" : " or less"));
  return std::nullopt;
}

std::optional<std::vector<std::string>> TableReader::texts(const std::string& key) {
  const toml::node* const node = take(key);
  if (node == nullptr) return std::nullopt;
  if (!node->is_array()) {
    wrong_kind(key, *node, "a list of texts", absl::StrCat("write ", key, " = [\"...\", \"...\"]"));
    return std::nullopt;
  }
  std::vector<std::string> values;
  for (const toml::node& entry : *node->as_array()) {
    if (entry.is_string()) {
      values.push_back(*entry.value<std::string>());
      continue;
    }
    findings_.add(entry.source(), field(key),
                  absl::StrCat(shown(entry), " in ", key, " is ", kind_of(entry), ", where a text is wanted"),
                  entry.is_number() ? absl::StrCat("write it in quotes: \"", shown(entry), "\"") : "");
  }
  return values;
}

std::optional<std::vector<double>> TableReader::numbers(const std::string& key) {
  const toml::node* const node = take(key);
  if (node == nullptr) return std::nullopt;
  if (!node->is_array()) {
    const std::string example = node->is_number() ? shown(*node) : "1.0, 2.0";
    wrong_kind(key, *node, "a list of numbers", absl::StrCat("write ", key, " = [", example, "]"));
    return std::nullopt;
  }
  std::vector<double> values;
  for (const toml::node& entry : *node->as_array()) {
    const std::optional<double> value = entry.is_number() ? entry.value<double>() : std::nullopt;
    if (!value.has_value()) {
      findings_.add(entry.source(), field(key),
                    absl::StrCat(shown(entry), " in ", key, " is ", kind_of(entry), ", where a number is wanted"));
    } else if (!std::isfinite(*value)) {
      findings_.add(entry.source(), field(key), absl::StrCat(shown(entry), " in ", key, " is no finite number"),
                    "write a finite one");
    } else {
      values.push_back(*value);
    }
  }
  return values;
}

std::optional<int> TableReader::word(const std::string& key, std::initializer_list<Word> words) {
  std::vector<std::string> known;
  for (const Word& word : words) known.push_back(absl::StrCat("\"", std::string(word.text), "\""));
  const std::string advice = absl::StrCat("write ", absl::StrJoin(known, " or "));
  const toml::node* const node = take(key);
  if (node == nullptr) return std::nullopt;
  if (!node->is_string()) {
    wrong_kind(key, *node, "a word", advice);
    return std::nullopt;
  }
  const std::string value = *node->value<std::string>();
  std::vector<std::string> texts;
  for (const Word& word : words) {
    if (word.text == value) return word.number;
    texts.emplace_back(word.text);
  }
  findings_.add(node->source(), field(key), absl::StrCat("there is no ", key, " = ", quoted(value)), advice,
                nearest(value, texts));
  return std::nullopt;
}

std::optional<google::protobuf::Timestamp> TableReader::instant(const std::string& key) {
  const std::string example = absl::StrCat(key, " = 2027-01-15T18:00:00Z");
  const toml::node* const node = take(key);
  if (node == nullptr) return std::nullopt;
  const auto* const date_time = node->as_date_time();
  if (date_time == nullptr) {
    wrong_kind(key, *node, "a date with a time",
               absl::StrCat("write it without quotes, with Z or an offset: ", example));
    return std::nullopt;
  }
  if (!date_time->get().offset.has_value()) {
    findings_.add(node->source(), field(key),
                  absl::StrCat(key, " = ", shown(*node), " does not say in which time zone"),
                  absl::StrCat("add Z for UTC, or an offset: ", shown(*node), "Z or ", shown(*node), "+01:00"));
    return std::nullopt;
  }
  std::optional<google::protobuf::Timestamp> stamp = to_timestamp(date_time->get());
  if (!stamp.has_value()) findings_.add(node->source(), field(key), absl::StrCat(shown(*node), " is before year 1"));
  return stamp;
}

void TableReader::require(const std::string& key, const std::string& example) {
  if (!has(key)) complain(key, absl::StrCat(title_, " has no ", key), absl::StrCat("add ", example));
}

void TableReader::refuse(const std::string& key, std::string text, std::string advice) {
  if (has(key)) complain(key, std::move(text), std::move(advice));
}

void TableReader::complain(const std::string& key, std::string text, std::string advice) {
  const toml::node* const node = table_.get(std::string_view(key));
  findings_.add(node == nullptr ? table_.source() : node->source(), node == nullptr ? path_ : field(key),
                std::move(text), std::move(advice));
}

void TableReader::finish() {
  for (const auto& [key, value] : table_) {
    const std::string name(key.str());
    if (std::find(known_.begin(), known_.end(), name) != known_.end()) continue;
    const std::string near = nearest(name, known_);
    findings_.add(key.source(), field(name), absl::StrCat("there is no key ", quoted(name), " in ", title_),
                  near.empty() ? absl::StrCat("it may have ", absl::StrJoin(known_, ", ")) : "", near);
  }
}

}  // namespace drover::studyfile
