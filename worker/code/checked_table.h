// A TOML table that is read key by key; what is wrong with it is collected, with its place. Internal to this folder.
#pragma once

#include <cstdint>
#include <map>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include <toml++/toml.h>

namespace drover::code {

// Problems of one file: 'file:line:column: what; what to do'.
class Complaints {
 public:
  explicit Complaints(std::string file) : file_(std::move(file)) {}
  void add(const toml::source_region& where, const std::string& what);
  void add_in(const std::string& file, int line, int column, const std::string& what);
  bool none() const { return lines_.empty(); }
  std::string text() const;  // one a line, in the order of their places

 private:
  std::string file_;
  std::vector<std::tuple<std::string, int, int, std::string>> lines_;
};

class CheckedTable {
 public:
  // `name` is how messages call it: "[code]", "[[output]]".
  CheckedTable(const toml::table& table, std::string name, Complaints& complaints)
      : table_(table), name_(std::move(name)), complaints_(complaints) {}

  // Each takes note that the key is known; a wrong type is complained about and read as absent.
  std::optional<std::string> text(std::string_view key);
  std::optional<std::int64_t> whole(std::string_view key, std::int64_t least, std::int64_t most);
  std::vector<std::string> texts(std::string_view key);  // an array of texts
  std::vector<std::int64_t> wholes(std::string_view key);
  const toml::table* table(std::string_view key);
  std::vector<const toml::table*> tables(std::string_view key);  // an array of tables
  // A text that must be there and not be empty.
  std::string needed(std::string_view key);

  // Complains about every key that nobody asked for, with the nearest known one.
  void end();

  toml::source_region place(std::string_view key) const;  // of the key's value, or of the table
  const toml::table& raw() const { return table_; }
  Complaints& complaints() { return complaints_; }
  const std::string& name() const { return name_; }

 private:
  const toml::node* find(std::string_view key);
  void wrong_type(const toml::node& node, std::string_view key, const char* wanted);

  const toml::table& table_;
  std::string name_;
  Complaints& complaints_;
  std::vector<std::string> known_;
};

// The name nearest to `text`; empty when none is near.
std::string nearest(std::string_view text, const std::vector<std::string>& names);

}  // namespace drover::code
