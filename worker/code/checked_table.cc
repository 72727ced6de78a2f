#include "code/checked_table.h"

#include <algorithm>
#include <numeric>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"

namespace drover::code {
namespace {

// Insertions, deletions, changes and swaps of neighbours that turn one text into the other (Damerau 1964,
// Communications of the ACM 7, 171-176, no part edited twice).
std::size_t distance(std::string_view a, std::string_view b) {
  std::vector<std::vector<std::size_t>> rows(a.size() + 1, std::vector<std::size_t>(b.size() + 1));
  std::iota(rows[0].begin(), rows[0].end(), std::size_t{0});
  for (std::size_t i = 1; i <= a.size(); ++i) {
    rows[i][0] = i;
    for (std::size_t j = 1; j <= b.size(); ++j) {
      const std::size_t changed = rows[i - 1][j - 1] + (a[i - 1] == b[j - 1] ? 0 : 1);
      rows[i][j] = std::min({changed, rows[i - 1][j] + 1, rows[i][j - 1] + 1});
      const bool swapped = i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1];
      if (swapped) rows[i][j] = std::min(rows[i][j], rows[i - 2][j - 2] + 1);
    }
  }
  return rows[a.size()][b.size()];
}

}  // namespace

std::string nearest(std::string_view text, const std::vector<std::string>& names) {
  std::string best;
  constexpr std::size_t kLongest = 100;  // no slip of the fingers is longer
  if (text.size() > kLongest) return best;
  std::size_t least = text.size() / 3 + 1;
  for (const std::string& name : names) {
    if (name.size() > kLongest) continue;
    const std::size_t apart = distance(text, name);
    if (apart >= least) continue;
    least = apart;
    best = name;
  }
  return best;
}

void Complaints::add(const toml::source_region& where, const std::string& what) {
  add_in(file_, static_cast<int>(where.begin.line), static_cast<int>(where.begin.column), what);
}

void Complaints::add_in(const std::string& file, int line, int column, const std::string& what) {
  lines_.emplace_back(file, line, column, what);
}

std::string Complaints::text() const {
  auto sorted = lines_;
  std::stable_sort(sorted.begin(), sorted.end(), [](const auto& a, const auto& b) {
    return std::tie(std::get<0>(a), std::get<1>(a), std::get<2>(a)) <
           std::tie(std::get<0>(b), std::get<1>(b), std::get<2>(b));
  });
  std::vector<std::string> shown;
  for (const auto& [file, line, column, what] : sorted)
    shown.push_back(absl::StrCat(file, ":", line, ":", column, ": ", what));
  return absl::StrJoin(shown, "\n");
}

const toml::node* CheckedTable::find(std::string_view key) {
  known_.emplace_back(key);
  return table_.get(key);
}

toml::source_region CheckedTable::place(std::string_view key) const {
  const toml::node* const node = table_.get(key);
  return node != nullptr ? node->source() : table_.source();
}

void CheckedTable::wrong_type(const toml::node& node, std::string_view key, const char* wanted) {
  complaints_.add(node.source(), absl::StrCat(std::string(key), " must be ", wanted));
}

std::optional<std::string> CheckedTable::text(std::string_view key) {
  const toml::node* const node = find(key);
  if (node == nullptr) return std::nullopt;
  std::optional<std::string> value = node->value_exact<std::string>();
  if (!value) wrong_type(*node, key, "a text in double quotes");
  return value;
}

std::optional<std::int64_t> CheckedTable::whole(std::string_view key, std::int64_t least, std::int64_t most) {
  const toml::node* const node = find(key);
  if (node == nullptr) return std::nullopt;
  const std::optional<std::int64_t> value = node->value_exact<std::int64_t>();
  if (value && *value >= least && *value <= most) return value;
  complaints_.add(node->source(), absl::StrCat(std::string(key), " must be a whole number from ", least, " to ", most));
  return std::nullopt;
}

std::vector<std::string> CheckedTable::texts(std::string_view key) {
  const toml::node* const node = find(key);
  std::vector<std::string> values;
  if (node == nullptr) return values;
  if (!node->is_array()) {
    wrong_type(*node, key, "an array of texts, as [\"one\", \"two\"]");
    return values;
  }
  for (const toml::node& one : *node->as_array()) {
    const std::optional<std::string> value = one.value_exact<std::string>();
    if (!value) wrong_type(one, key, "an array of texts, as [\"one\", \"two\"]");
    if (value) values.push_back(*value);
  }
  return values;
}

std::vector<std::int64_t> CheckedTable::wholes(std::string_view key) {
  const toml::node* const node = find(key);
  std::vector<std::int64_t> values;
  if (node == nullptr) return values;
  if (!node->is_array()) {
    wrong_type(*node, key, "an array of whole numbers, as [0, 2]");
    return values;
  }
  for (const toml::node& one : *node->as_array()) {
    const std::optional<std::int64_t> value = one.value_exact<std::int64_t>();
    if (!value) wrong_type(one, key, "an array of whole numbers, as [0, 2]");
    if (value) values.push_back(*value);
  }
  return values;
}

const toml::table* CheckedTable::table(std::string_view key) {
  const toml::node* const node = find(key);
  if (node == nullptr) return nullptr;
  if (!node->is_table()) wrong_type(*node, key, "a table");
  return node->as_table();
}

std::vector<const toml::table*> CheckedTable::tables(std::string_view key) {
  const toml::node* const node = find(key);
  std::vector<const toml::table*> found;
  if (node == nullptr) return found;
  const bool right = node->is_array() && node->as_array()->is_homogeneous(toml::node_type::table);
  if (!right) {
    complaints_.add(node->source(), absl::StrCat(std::string(key), " must be written as [[", std::string(key), "]]"));
    return found;
  }
  for (const toml::node& one : *node->as_array()) found.push_back(one.as_table());
  return found;
}

std::string CheckedTable::needed(std::string_view key) {
  const bool there = table_.contains(key);
  const std::optional<std::string> value = text(key);
  if (!there) {
    complaints_.add(table_.source(),
                    absl::StrCat(name_, " has no ", std::string(key), "; add ", std::string(key), " = \"...\""));
  } else if (value && value->empty()) {
    complaints_.add(place(key), absl::StrCat(std::string(key), " is empty"));
  }
  return value.value_or("");
}

void CheckedTable::end() {
  for (const auto& [key, value] : table_) {
    const std::string name(key.str());
    if (std::find(known_.begin(), known_.end(), name) != known_.end()) continue;
    const std::string near = nearest(name, known_);
    complaints_.add(key.source(),
                    near.empty()
                        ? absl::StrCat("unknown key ", name, " in ", name_, "; known are ", absl::StrJoin(known_, ", "))
                        : absl::StrCat("unknown key ", name, " in ", name_, "; did you mean ", near, "?"));
  }
}

}  // namespace drover::code
