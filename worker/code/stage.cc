#include "code/stage.h"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstdlib>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <map>
#include <utility>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_join.h"
#include "status/try.h"

namespace drover::code {
namespace {

namespace fs = std::filesystem;

absl::Status write_file(const std::string& path, std::string_view text) {
  const int file = open(path.c_str(), O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC | O_NOFOLLOW, 0600);
  int error = file < 0 ? errno : 0;
  while (error == 0 && !text.empty()) {
    const ssize_t written = write(file, text.data(), text.size());
    if (written < 0 && errno != EINTR) error = errno;
    if (written > 0) text.remove_prefix(static_cast<std::size_t>(written));
  }
  if (file >= 0 && close(file) != 0 && error == 0) error = errno;
  if (error == 0) return absl::OkStatus();
  const std::string why = absl::StrCat(path, ": ", std::strerror(error));
  return error == ENOSPC || error == EDQUOT ? absl::ResourceExhaustedError(why) : absl::UnavailableError(why);
}

absl::Status make_parent(const std::string& work, const std::string& name) {
  const fs::path parent = fs::path(name).parent_path();
  std::error_code error;
  if (!parent.empty()) fs::create_directories(fs::path(work) / parent, error);
  return error ? absl::UnavailableError(absl::StrCat(name, ": ", error.message())) : absl::OkStatus();
}

// Exactly what the code accepts, each of its kind.
absl::StatusOr<std::map<std::string, v1::NamedValue>> check_inputs(const Definition& definition,
                                                                   std::span<const v1::NamedValue> inputs) {
  std::map<std::string, v1::NamedValue> values;
  for (const v1::NamedValue& input : inputs) {
    const auto at = std::find_if(definition.accepts.begin(), definition.accepts.end(),
                                 [&](const v1::Accepted& accepted) { return accepted.name() == input.name(); });
    if (at == definition.accepts.end()) {
      return absl::InvalidArgumentError(absl::StrCat("code ", definition.name, " accepts no ", input.name()));
    }
    const bool choice = at->choices_size() > 0;
    if (choice != input.has_text()) {
      return absl::InvalidArgumentError(
          absl::StrCat(input.name(), " must be ", choice ? "one of its choices" : "a number"));
    }
    if (choice && std::find(at->choices().begin(), at->choices().end(), input.text()) == at->choices().end()) {
      return absl::InvalidArgumentError(absl::StrCat(input.name(), " cannot be \"", input.text(), "\"; choices are ",
                                                     absl::StrJoin(at->choices(), ", ")));
    }
    values[input.name()] = input;
  }
  for (const v1::Accepted& accepted : definition.accepts) {
    if (!values.contains(accepted.name()))
      return absl::InvalidArgumentError(absl::StrCat(accepted.name(), " was not given"));
  }
  return values;
}

absl::Status copy_files(const Definition& definition, const std::string& work) {
  for (const std::string& name : definition.files) {
    DROVER_TRY(make_parent(work, name));
    std::error_code error;
    fs::copy_file(fs::path(definition.folder) / name, fs::path(work) / name, error);
    if (!error) continue;
    const std::string why = absl::StrCat(name, ": ", error.message());
    const bool full = error == std::errc::no_space_on_device;
    return full ? absl::ResourceExhaustedError(why) : absl::UnavailableError(why);
  }
  return absl::OkStatus();
}

// Nothing of the worker's own environment but what the definition names.
std::vector<std::string> environment_of(const Definition& definition, const std::string& work) {
  std::map<std::string, std::string> variables = {
      {"HOME", work},
      {"LC_ALL", "C"},
      {"OMP_NUM_THREADS", absl::StrCat(definition.cores)},
      {"PATH", definition.path.empty()
                   ? "/usr/local/bin:/usr/bin:/bin"
                   : absl::StrCat(absl::StrJoin(definition.path, ":"), ":/usr/local/bin:/usr/bin:/bin")},
      {"TMPDIR", work}};
  for (const std::string& name : definition.inherit) {
    if (const char* const value = std::getenv(name.c_str())) variables[name] = value;
  }
  for (const auto& [name, value] : definition.environment) variables[name] = value;
  std::vector<std::string> environment;
  for (const auto& [name, value] : variables) environment.push_back(absl::StrCat(name, "=", value));
  return environment;
}

}  // namespace

absl::StatusOr<Staged> stage(const Definition& definition, std::span<const v1::NamedValue> inputs,
                             const std::string& work) {
  DROVER_ASSIGN(const auto values, check_inputs(definition, inputs));
  for (const Input& input : definition.inputs) {
    const absl::StatusOr<std::string> text = input.text.render(values, definition.texts);
    if (!text.ok()) return absl::InvalidArgumentError(absl::StrCat(input.writes, ": ", text.status().message()));
    DROVER_TRY(make_parent(work, input.writes));
    DROVER_TRY(write_file(absl::StrCat(work, "/", input.writes), *text));
  }
  DROVER_TRY(copy_files(definition, work));
  return Staged{.command = definition.command, .environment = environment_of(definition, work)};
}

}  // namespace drover::code
