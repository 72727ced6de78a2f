#include "code/definition.h"

#include <fcntl.h>
#include <openssl/sha.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <filesystem>
#include <fstream>
#include <set>
#include <sstream>
#include <utility>

#include "absl/strings/escaping.h"
#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "code/checked_table.h"
#include "code/span.h"
#include "status/try.h"

namespace drover::code {
namespace {

namespace fs = std::filesystem;

constexpr absl::Duration kUsualGrace = absl::Seconds(30);
constexpr std::int64_t kMostCores = 100'000;

// What a definition is read with: the file, its problems, and what goes into its digest.
struct Reading {
  Definition& definition;
  Complaints& complaints;
  std::vector<std::pair<std::string, std::string>> digested;  // name, bytes
};

std::optional<std::string> read_file(const std::string& path) {
  std::ifstream file(path, std::ios::binary);
  if (!file) return std::nullopt;
  std::ostringstream bytes;
  bytes << file.rdbuf();
  return bytes.str();
}

// Relative, and it stays below the folder it is taken from.
bool is_plain_name(const std::string& name) {
  if (name.empty() || name.size() > 255 || name.front() == '/') return false;
  const bool control = std::any_of(name.begin(), name.end(), [](unsigned char c) { return c < 0x20 || c == 0x7f; });
  const fs::path path(name);
  return !control &&
         std::none_of(path.begin(), path.end(), [](const fs::path& part) { return part == ".." || part == "."; });
}

bool check_name(CheckedTable& table, std::string_view key, const std::string& name) {
  if (name.empty()) return false;  // complained about already
  if (is_plain_name(name)) return true;
  table.complaints().add(table.place(key),
                         absl::StrCat(std::string(key), " = \"", name, "\" must be a name inside the run's folder"));
  return false;
}

absl::Duration read_span(CheckedTable& table, std::string_view key, absl::Duration usual) {
  const std::optional<std::string> text = table.text(key);
  if (!text) return usual;
  const absl::StatusOr<absl::Duration> span = parse_span(*text);
  if (span.ok() && *span > absl::ZeroDuration()) return *span;
  table.complaints().add(table.place(key),
                         absl::StrCat(std::string(key), " = \"", *text,
                                      "\" is no span of time above 0; write it as \"90s\", \"2h\" or \"1h30m\""));
  return usual;
}

std::int64_t read_memory(CheckedTable& table) {
  const std::optional<std::string> text = table.text("memory");
  if (!text) return 0;
  const absl::StatusOr<std::int64_t> bytes = parse_size(*text);
  if (bytes.ok()) return *bytes;
  table.complaints().add(table.place("memory"),
                         absl::StrCat("memory = \"", *text, "\" is no size; write it as \"512MiB\" or \"4GiB\""));
  return 0;
}

// --- [code] ---

std::string find_program(const Definition& definition, const std::string& program, std::vector<std::string>& looked) {
  std::vector<std::string> places;
  if (program.front() == '/') {
    places.push_back(program);
  } else {
    places.push_back(absl::StrCat(definition.folder, "/", program));
    const bool bare = program.find('/') == std::string::npos;
    for (const std::string& folder : definition.path) {
      if (bare) places.push_back(absl::StrCat(folder, "/", program));
    }
  }
  for (const std::string& place : places) {
    struct stat info {};
    if (stat(place.c_str(), &info) == 0 && S_ISREG(info.st_mode) && access(place.c_str(), X_OK) == 0) {
      std::error_code error;
      const fs::path real = fs::canonical(place, error);
      return error ? place : real.string();
    }
    looked.push_back(place);
  }
  return {};
}

void read_command(CheckedTable& code, Reading& reading) {
  Definition& definition = reading.definition;
  const bool there = code.raw().contains("command");
  definition.command = code.texts("command");
  if (definition.command.empty()) {
    if (!there)
      code.complaints().add(code.raw().source(), "[code] has no command; add command = [\"program\", \"argument\"]");
    if (there) code.complaints().add(code.place("command"), "command is empty");
    return;
  }
  if (definition.command.front().empty())
    return code.complaints().add(code.place("command"), "command names no program");
  std::vector<std::string> looked;
  const std::string program = find_program(definition, definition.command.front(), looked);
  if (program.empty()) {
    return code.complaints().add(
        code.place("command"),
        absl::StrCat("program ", definition.command.front(), " is not there or cannot be executed; looked for ",
                     absl::StrJoin(looked, ", "), looked.size() == 1 ? "; name further folders in path = [...]" : ""));
  }
  definition.command.front() = program;
}

void read_licences(CheckedTable& code, Definition& definition) {
  const toml::table* const licences = code.table("licences");
  if (licences == nullptr) return;
  for (const auto& [key, value] : *licences) {
    const std::optional<std::int64_t> count = value.value_exact<std::int64_t>();
    if (count && *count >= 1 && *count <= kMostCores) {
      definition.licences[std::string(key.str())] = static_cast<std::int32_t>(*count);
    } else {
      code.complaints().add(value.source(),
                            absl::StrCat("licence ", std::string(key.str()), " must be a whole number, 1 or more"));
    }
  }
}

bool is_variable_name(const std::string& name) {
  return !name.empty() && name.find_first_of("= \t\n") == std::string::npos && name.find('\0') == std::string::npos;
}

void read_environment(CheckedTable& code, Definition& definition) {
  if (const toml::table* const environment = code.table("environment")) {
    for (const auto& [key, value] : *environment) {
      const std::optional<std::string> text = value.value_exact<std::string>();
      const std::string name(key.str());
      if (!text || !is_variable_name(name)) {
        code.complaints().add(value.source(),
                              absl::StrCat("environment.", name, " must be a text, and its name a variable's"));
      } else {
        definition.environment[name] = *text;
      }
    }
  }
  definition.inherit = code.texts("inherit");
  definition.path = code.texts("path");
  for (const std::string& folder : definition.path) {
    if (folder.empty() || folder.front() != '/')
      code.complaints().add(code.place("path"), absl::StrCat("path \"", folder, "\" must begin with /"));
  }
}

void read_files(CheckedTable& code, Reading& reading) {
  for (const std::string& name : code.texts("files")) {
    if (!is_plain_name(name)) {
      code.complaints().add(code.place("files"),
                            absl::StrCat("\"", name, "\" must be a name inside the definition's folder"));
      continue;
    }
    const std::optional<std::string> bytes = read_file(absl::StrCat(reading.definition.folder, "/", name));
    if (!bytes) {
      code.complaints().add(code.place("files"), absl::StrCat("file ", name, " is not in ", reading.definition.folder));
      continue;
    }
    reading.definition.files.push_back(name);
    reading.digested.emplace_back(absl::StrCat("file ", name), *bytes);
  }
}

void read_code(const toml::table& table, Reading& reading) {
  Definition& definition = reading.definition;
  CheckedTable code(table, "[code]", reading.complaints);
  definition.name = code.needed("name");
  definition.version = code.needed("version");
  read_environment(code, definition);  // before the command, which is looked for in path
  read_command(code, reading);
  if (!table.contains("time_limit")) {
    reading.complaints.add(table.source(),
                           "[code] has no time_limit; add time_limit = \"2h\" (a run that hangs would hold its slot "
                           "and licences for ever)");
  }
  definition.time_limit = read_span(code, "time_limit", absl::Hours(1));
  definition.grace = read_span(code, "grace", kUsualGrace);
  definition.cores = static_cast<int>(code.whole("cores", 1, kMostCores).value_or(1));
  definition.memory_bytes = read_memory(code);
  read_licences(code, definition);
  read_files(code, reading);
  code.end();
}

// --- [[accepts]], [[input]], [[output]], [healthy] ---

void read_accepts(const toml::table& table, Reading& reading) {
  CheckedTable accepts(table, "[[accepts]]", reading.complaints);
  v1::Accepted accepted;
  accepted.set_name(accepts.needed("name"));
  accepted.set_unit(accepts.text("unit").value_or(""));
  for (const std::string& choice : accepts.texts("choices")) accepted.add_choices(choice);
  if (const toml::table* const texts = accepts.table("texts")) {
    for (const auto& [key, value] : *texts) {
      const std::string choice(key.str());
      const std::optional<std::string> text = value.value_exact<std::string>();
      const bool known =
          std::find(accepted.choices().begin(), accepted.choices().end(), choice) != accepted.choices().end();
      if (!text) reading.complaints.add(value.source(), absl::StrCat("texts.", choice, " must be a text"));
      if (!known)
        reading.complaints.add(key.source(), absl::StrCat("texts: ", accepted.name(), " has no choice ", choice));
      if (text && known) reading.definition.texts[accepted.name()][choice] = *text;
    }
  }
  accepts.end();
  auto& all = reading.definition.accepts;
  const bool twice =
      std::any_of(all.begin(), all.end(), [&](const v1::Accepted& other) { return other.name() == accepted.name(); });
  if (twice)
    return reading.complaints.add(accepts.place("name"), absl::StrCat("input ", accepted.name(), " is accepted twice"));
  if (!accepted.name().empty()) all.push_back(std::move(accepted));
}

std::vector<std::string> accepted_names(const Definition& definition) {
  std::vector<std::string> names;
  for (const v1::Accepted& accepted : definition.accepts) names.push_back(accepted.name());
  return names;
}

std::map<std::string, Format> read_formats(CheckedTable& input, const Definition& definition) {
  std::map<std::string, Format> formats;
  const toml::table* const table = input.table("formats");
  if (table == nullptr) return formats;
  const std::vector<std::string> names = accepted_names(definition);
  for (const auto& [key, value] : *table) {
    const std::string name(key.str());
    if (!value.is_table()) {
      input.complaints().add(
          value.source(), absl::StrCat("formats.", name, " must be a table, as { format = \"%12.5e\", width = 12 }"));
      continue;
    }
    CheckedTable one(*value.as_table(), absl::StrCat("formats.", name), input.complaints());
    Format format{.conversion = one.text("format").value_or(""),
                  .width = static_cast<int>(one.whole("width", 1, 1000).value_or(0))};
    one.end();
    if (const absl::Status sound = check_format(format); !sound.ok()) {
      input.complaints().add(one.place("format"), std::string(sound.message()));
    }
    if (std::find(names.begin(), names.end(), name) == names.end()) {
      const std::string near = nearest(name, names);
      input.complaints().add(key.source(),
                             absl::StrCat("formats: the code accepts no ", name,
                                          near.empty() ? "" : absl::StrCat("; did you mean ", near, "?")));
    }
    formats[name] = std::move(format);
  }
  return formats;
}

Template::Marks read_marks(CheckedTable& input) {
  Template::Marks marks;
  const bool there = input.raw().contains("marks");
  const std::vector<std::string> given = input.texts("marks");
  if (!there) return marks;
  if (given.size() == 2 && !given[0].empty() && !given[1].empty()) return {given[0], given[1]};
  input.complaints().add(input.place("marks"), "marks must be two texts, as [\"<<\", \">>\"]");
  return marks;
}

void read_template(CheckedTable& input, Reading& reading, const std::string& name, Input made,
                   const Template::Marks& marks, std::map<std::string, Format> formats) {
  Definition& definition = reading.definition;
  const std::string path = absl::StrCat(definition.folder, "/", name);
  const std::optional<std::string> text = read_file(path);
  if (!text)
    return input.complaints().add(input.place("template"),
                                  absl::StrCat("template ", name, " is not in ", definition.folder));
  reading.digested.emplace_back(absl::StrCat("template ", name), *text);
  absl::StatusOr<Template> parsed = Template::parse(*text, marks, std::move(formats));
  if (!parsed.ok())
    return input.complaints().add(input.place("template"),
                                  absl::StrCat("template ", name, ": ", parsed.status().message()));
  const std::vector<std::string> names = accepted_names(definition);
  for (const std::string& used : parsed->names()) {
    if (std::find(names.begin(), names.end(), used) != names.end()) continue;
    const auto [line, column] = parsed->place_of(used);
    const std::string near = nearest(used, names);
    input.complaints().add_in(
        path, line, column,
        absl::StrCat(marks.open, used, marks.close, ": the code accepts no ", used,
                     near.empty() ? "; add it as [[accepts]]" : absl::StrCat("; did you mean ", near, "?")));
  }
  made.text = *std::move(parsed);
  definition.inputs.push_back(std::move(made));
}

void read_input(const toml::table& table, Reading& reading) {
  CheckedTable input(table, "[[input]]", reading.complaints);
  const std::string name = input.needed("template");
  Input made{.writes = input.needed("writes"), .text = {}};
  const Template::Marks marks = read_marks(input);
  std::map<std::string, Format> formats = read_formats(input, reading.definition);
  input.end();
  const bool named = check_name(input, "template", name) && check_name(input, "writes", made.writes);
  if (named) read_template(input, reading, name, std::move(made), marks, std::move(formats));
}

void read_output_table(const toml::table& table, Reading& reading) {
  CheckedTable output(table, "[[output]]", reading.complaints);
  OutputReader made{.name = output.needed("name"),
                    .unit = output.text("unit").value_or(""),
                    .file = output.needed("file"),
                    .after = output.text("after").value_or(""),
                    .match = static_cast<int>(output.whole("match", 1, 1'000'000'000).value_or(1)),
                    .line = output.whole("line", 1, 1'000'000'000'000).value_or(0),
                    .column = static_cast<int>(output.whole("column", 1, 1'000'000).value_or(0))};
  output.end();
  check_name(output, "file", made.file);
  const bool by_text = !made.after.empty(), by_place = made.line > 0 && made.column > 0;
  if (by_text == by_place || (by_text && (made.line > 0 || made.column > 0))) {
    reading.complaints.add(table.source(),
                           absl::StrCat("output ", made.name, " needs either after = \"TEXT\", or line and column"));
  }
  if (table.contains("match") && !by_text) reading.complaints.add(output.place("match"), "match goes with after only");
  auto& all = reading.definition.outputs;
  const bool twice =
      std::any_of(all.begin(), all.end(), [&](const OutputReader& other) { return other.name == made.name; });
  if (twice) return reading.complaints.add(output.place("name"), absl::StrCat("output ", made.name, " is there twice"));
  all.push_back(std::move(made));
}

void read_healthy(const toml::table& table, Reading& reading) {
  CheckedTable healthy(table, "[healthy]", reading.complaints);
  if (table.contains("exit_codes")) {
    reading.definition.healthy_exit_codes.clear();
    for (const std::int64_t code : healthy.wholes("exit_codes")) {
      if (code < 0 || code > 255)
        reading.complaints.add(healthy.place("exit_codes"),
                               absl::StrCat("exit code ", code, " is not between 0 and 255"));
      reading.definition.healthy_exit_codes.push_back(static_cast<int>(code));
    }
  }
  reading.definition.absent = healthy.texts("absent");
  healthy.end();
  for (const std::string& text : reading.definition.absent) {
    if (text.empty()) reading.complaints.add(healthy.place("absent"), "an empty text is in every file");
  }
}

void check_use(const toml::table& file, Reading& reading) {
  const Definition& definition = reading.definition;
  if (definition.outputs.empty())
    reading.complaints.add(file.source(), "there is no [[output]]: nothing would be learned from a run");
  if (definition.inputs.empty()) return;
  std::set<std::string> used;
  for (const Input& input : definition.inputs) used.insert(input.text.names().begin(), input.text.names().end());
  const toml::array* const tables = file["accepts"].as_array();
  for (std::size_t i = 0; tables != nullptr && i < tables->size(); ++i) {
    const std::optional<std::string> name = (*tables->get(i)->as_table())["name"].value<std::string>();
    if (name && !used.contains(*name)) {
      reading.complaints.add(tables->get(i)->source(),
                             absl::StrCat("input ", *name, " is accepted, and no template has a mark for it"));
    }
  }
}

void read_all(const toml::table& file, Reading& reading) {
  CheckedTable top(file, "the file", reading.complaints);
  const toml::table* const code = top.table("code");
  if (code == nullptr) {
    if (!file.contains("code")) reading.complaints.add(file.source(), "there is no [code] table");
  } else {
    read_code(*code, reading);
  }
  for (const toml::table* const table : top.tables("accepts")) read_accepts(*table, reading);
  for (const toml::table* const table : top.tables("input")) read_input(*table, reading);
  for (const toml::table* const table : top.tables("output")) read_output_table(*table, reading);
  if (const toml::table* const healthy = top.table("healthy")) read_healthy(*healthy, reading);
  top.end();
  if (reading.complaints.none()) check_use(file, reading);
}

// Whoever can write the definition says what this worker executes.
absl::Status check_rights(const std::string& path) {
  struct stat info {};
  if (stat(path.c_str(), &info) != 0) return absl::NotFoundError(absl::StrCat("there is no file ", path));
  if (info.st_uid != geteuid() && info.st_uid != 0) {
    return absl::PermissionDeniedError(
        absl::StrCat(path, " belongs to another user, who could name any program in it"));
  }
  if ((info.st_mode & (S_IWGRP | S_IWOTH)) != 0) {
    return absl::PermissionDeniedError(absl::StrCat(
        path, " can be written by others, who could name any program in it; close it with: chmod go-w ", path));
  }
  return absl::OkStatus();
}

std::string digest_of(const std::vector<std::pair<std::string, std::string>>& parts) {
  std::string all;
  for (const auto& [name, bytes] : parts) absl::StrAppend(&all, name.size(), ":", name, bytes.size(), ":", bytes);
  std::string digest(SHA256_DIGEST_LENGTH, '\0');
  SHA256(reinterpret_cast<const unsigned char*>(all.data()), all.size(),
         reinterpret_cast<unsigned char*>(digest.data()));
  return absl::BytesToHexString(digest);
}

}  // namespace

absl::StatusOr<Definition> read_definition(const std::string& folder) {
  std::error_code error;
  const fs::path real = fs::canonical(folder, error);
  if (error) return absl::NotFoundError(absl::StrCat("there is no folder ", folder));
  Definition definition;
  definition.folder = real.string();
  const std::string path = absl::StrCat(definition.folder, "/code.toml");
  const std::optional<std::string> text = read_file(path);
  if (!text) return absl::NotFoundError(absl::StrCat("there is no file ", path));
  DROVER_TRY(check_rights(definition.folder));
  DROVER_TRY(check_rights(path));
  Complaints complaints(path);
  Reading reading{.definition = definition, .complaints = complaints, .digested = {{"definition", *text}}};
  try {
    const toml::table file = toml::parse(*text, path);
    read_all(file, reading);
  } catch (const toml::parse_error& wrong) {
    complaints.add(wrong.source(), std::string(wrong.description()));
  }
  if (!complaints.none()) return absl::InvalidArgumentError(complaints.text());
  definition.digest = digest_of(reading.digested);
  return definition;
}

v1::CodeDefinition Definition::to_proto() const {
  v1::CodeDefinition made;
  made.set_name(name);
  made.set_version(version);
  made.set_digest(digest);
  for (const v1::Accepted& accepted : accepts) *made.add_accepts() = accepted;
  for (const OutputReader& output : outputs) {
    v1::CodeOutput& one = *made.add_outputs();
    one.set_name(output.name);
    one.set_unit(output.unit);
  }
  made.set_cores(cores);
  made.set_memory_bytes(memory_bytes);
  made.mutable_licences()->insert(licences.begin(), licences.end());
  made.mutable_time_limit()->set_seconds(absl::ToInt64Seconds(time_limit));
  made.mutable_time_limit()->set_nanos(static_cast<std::int32_t>(
      absl::ToInt64Nanoseconds(time_limit - absl::Seconds(absl::ToInt64Seconds(time_limit)))));
  made.mutable_grace()->set_seconds(absl::ToInt64Seconds(grace));
  made.mutable_grace()->set_nanos(
      static_cast<std::int32_t>(absl::ToInt64Nanoseconds(grace - absl::Seconds(absl::ToInt64Seconds(grace)))));
  return made;
}

}  // namespace drover::code
