// Reads one table of a study file key by key, ticks off what was asked for, and complains of the rest. Internal to this
// folder: the only header that knows toml++.
#pragma once

#include <toml++/toml.h>

#include <cstdint>
#include <initializer_list>
#include <optional>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

#include "google/protobuf/timestamp.pb.h"
#include "studyfile/complaint.h"

namespace drover::studyfile {

// Collects the complaints of one file.
class Findings {
 public:
  explicit Findings(std::string file) : file_(std::move(file)) {}
  void add(const toml::source_region& where, std::string field, std::string text, std::string advice = "",
           std::string nearest = "");
  std::vector<Complaint> take();  // by place

 private:
  std::string file_;
  std::vector<Complaint> complaints_;
};

std::string quoted(std::string_view text);    // "text", cut at 60 characters
std::string kind_of(const toml::node& node);  // "a text", "an integer", "a table"...
std::string shown(const toml::node& node);    // as it would stand in a file; cut at 60 characters

// A word that a key may have, and the number of the enumerator that it stands for.
struct Word {
  std::string_view text;
  int number;
};

// Every reading call makes `key` known, gives nothing when the key is absent, and complains and gives nothing when its
// value will not do. Ask for every key of the table, then call finish().
class TableReader {
 public:
  // `path`: of the table, "study" or "variable[2]". `title`: what messages call it, "[study]", "variable \"wall\"".
  TableReader(const toml::table& table, std::string path, std::string title, Findings& findings)
      : table_(table), path_(std::move(path)), title_(std::move(title)), findings_(findings) {}

  bool has(const std::string& key) const { return table_.contains(std::string_view(key)); }
  const std::string& title() const { return title_; }
  void set_title(std::string title) { title_ = std::move(title); }

  std::optional<std::string> text(const std::string& key);  // not empty
  std::optional<double> number(const std::string& key);     // integers too; finite
  std::optional<std::int64_t> integer(const std::string& key, std::int64_t least, std::int64_t most);
  std::optional<std::vector<std::string>> texts(const std::string& key);
  std::optional<std::vector<double>> numbers(const std::string& key);
  std::optional<int> word(const std::string& key, std::initializer_list<Word> words);
  std::optional<google::protobuf::Timestamp> instant(const std::string& key);  // a date-time with an offset

  // Complains at the table's head unless it has `key`. `example`: a line to add.
  void require(const std::string& key, const std::string& example);
  // Complains at `key`, if it is there: it does not belong here.
  void refuse(const std::string& key, std::string text, std::string advice);
  // Complains at `key`, or where it is absent at the table's head.
  void complain(const std::string& key, std::string text, std::string advice = "");
  // Makes keys known that need not be read.
  void know(std::initializer_list<const char*> keys);
  // Complains of every key that nobody asked for.
  void finish();

 private:
  const toml::node* take(const std::string& key);
  std::string field(const std::string& key) const;
  void wrong_kind(const std::string& key, const toml::node& node, const std::string& wanted, std::string advice);

  const toml::table& table_;
  std::string path_, title_;
  Findings& findings_;
  std::vector<std::string> known_;
};

}  // namespace drover::studyfile
