#include "studyfile/study_file.h"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <array>
#include <cerrno>
#include <cstring>
#include <utility>

#include "absl/status/status.h"
#include "absl/strings/str_cat.h"
#include "studyfile/parts.h"

namespace drover::studyfile {
namespace {

// --- places ---

void map_node(const toml::node& node, const std::string& path, SourceMap& places) {
  const auto begin = node.source().begin;
  places.set(path, {static_cast<int>(begin.line), static_cast<int>(begin.column)});
  if (const toml::table* const table = node.as_table()) {
    for (const auto& [key, value] : *table) map_node(value, absl::StrCat(path, ".", std::string(key.str())), places);
  } else if (const toml::array* const array = node.as_array()) {
    int index = 0;
    for (const toml::node& entry : *array) map_node(entry, absl::StrCat(path, "[", index++, "]"), places);
  }
}

// --- tables ---

// [name], once. Null, perhaps with a complaint, when there is none.
const toml::table* single(const toml::table& root, const std::string& name, Findings& findings) {
  const toml::node* const node = root.get(std::string_view(name));
  if (node == nullptr) return nullptr;
  if (node->is_table()) return node->as_table();
  findings.add(node->source(), std::string(name),
               absl::StrCat(name, " is ", kind_of(*node), ", where a table is wanted"),
               absl::StrCat("write [", name, "] once, in single brackets"));
  return nullptr;
}

// Every [[name]], handed to read(reader, *add()).
template <class Add, class Read>
void each(const toml::table& root, const std::string& name, Findings& findings, Add add, Read read) {
  const toml::node* const node = root.get(std::string_view(name));
  if (node == nullptr) return;
  const std::string advice = absl::StrCat("write [[", name, "]], in double brackets, once for each");
  const toml::array* const array = node->as_array();
  if (array == nullptr) {
    findings.add(node->source(), std::string(name),
                 absl::StrCat(name, " is ", kind_of(*node), ", where a list of tables is wanted"), advice);
    return;
  }
  int index = 0;
  for (const toml::node& entry : *array) {
    const std::string path = absl::StrCat(name, "[", index++, "]");
    auto* const message = add();
    if (const toml::table* const table = entry.as_table()) {
      TableReader reader(*table, path, absl::StrCat("[[", name, "]]"), findings);
      read(reader, *message);
    } else {
      findings.add(entry.source(), path, absl::StrCat(path, " is ", kind_of(entry), ", where a table is wanted"),
                   advice);
    }
  }
}

template <class Message>
void one(const toml::table& root, const std::string& name, Findings& findings, void (*read)(TableReader&, Message&),
         Message& message) {
  const toml::table* const table = single(root, name, findings);
  if (table == nullptr) return;
  TableReader reader(*table, name, absl::StrCat("[", name, "]"), findings);
  read(reader, message);
}

void read_tables(const toml::table& root, v1::StudySpec& spec, Findings& findings) {
  one(root, "study", findings, read_study, spec);
  each(
      root, "variable", findings, [&] { return spec.add_variables(); }, read_variable);
  each(
      root, "condition", findings, [&] { return spec.add_conditions(); }, read_condition);
  each(
      root, "derived", findings, [&] { return spec.add_derived(); }, read_derived);
  each(
      root, "objective", findings, [&] { return spec.add_objectives(); }, read_objective);
  each(
      root, "constraint", findings, [&] { return spec.add_constraints(); }, read_constraint);
  if (root.contains("search")) one(root, "search", findings, read_search, *spec.mutable_search());
  if (root.contains("budget")) one(root, "budget", findings, read_budget, *spec.mutable_budget());
}

// Tables that are unknown, and mandatory ones that are missing.
void check_root(const toml::table& root, Findings& findings) {
  TableReader reader(root, "", "a study file", findings);
  reader.know({"study", "variable", "condition", "derived", "objective", "constraint", "search", "budget"});
  const auto need = [&](const std::string& name, std::string advice) {
    if (!root.contains(std::string_view(name)))
      reader.complain(name, absl::StrCat("the file has no ", name), std::move(advice));
  };
  need("study", "add [study] with name = \"...\" and code = \"...\"");
  need("variable", "add [[variable]] with name, low and high");
  need("objective", "add [[objective]] with minimise = \"...\" or maximise = \"...\"");
  for (const char* name : {"variable", "objective"}) {
    const toml::array* const list = root[name].as_array();
    if (list != nullptr && list->empty())
      reader.complain(name, absl::StrCat("the list ", name, " is empty"), "add at least one");
  }
  reader.finish();
}

std::string decapitalised(std::string_view description) {
  // toml++ puts "Error while parsing X: " before what is wrong.
  constexpr std::string_view kPrefix = "Error while parsing ";
  if (description.starts_with(kPrefix)) description.remove_prefix(kPrefix.size());
  return std::string(description);
}

absl::Status cannot_read(const std::string& path, int error) {
  return absl::Status(absl::ErrnoToStatusCode(error),
                      absl::StrCat(path, ": the study file cannot be read: ", std::strerror(error)));
}

struct File {
  int descriptor;
  ~File() { ::close(descriptor); }
};

absl::StatusOr<std::string> read_all(const std::string& path) {
  const int descriptor = ::open(path.c_str(), O_RDONLY | O_CLOEXEC);
  if (descriptor < 0) return cannot_read(path, errno);
  const File file{descriptor};
  std::string text;
  std::array<char, 65536> piece;
  while (text.size() <= kLargestFile) {
    const ssize_t count = ::read(file.descriptor, piece.data(), piece.size());
    if (count < 0 && errno == EINTR) continue;
    if (count < 0) return cannot_read(path, errno);
    if (count == 0) return text;
    text.append(piece.data(), static_cast<std::size_t>(count));
  }
  return absl::InvalidArgumentError(
      absl::StrCat(path, ": the study file is larger than ", kLargestFile / 1024, " KiB; is it the right file?"));
}

}  // namespace

StudyFile parse_study_file(std::string_view text, std::string name) {
  StudyFile file;
  file.name = name;
  Findings findings(std::move(name));
  try {
    const toml::table root = toml::parse(text, std::string_view(file.name));
    for (const auto& [key, value] : root) map_node(value, std::string(key.str()), file.places);
    check_root(root, findings);
    read_tables(root, file.spec, findings);
  } catch (const toml::parse_error& error) {
    findings.add(error.source(), "", absl::StrCat("this is no TOML: ", decapitalised(error.description())),
                 "correct this place; texts stand in double quotes, tables begin with [name] or [[name]]");
  }
  file.complaints = findings.take();
  return file;
}

absl::StatusOr<StudyFile> read_study_file(const std::string& path) {
  absl::StatusOr<std::string> text = read_all(path);
  if (!text.ok()) return text.status();
  return parse_study_file(*text, path);
}

}  // namespace drover::studyfile
