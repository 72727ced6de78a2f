#include "places.h"

#include <unistd.h>

#include <algorithm>
#include <cstdlib>
#include <filesystem>
#include <system_error>

#include "absl/strings/ascii.h"
#include "absl/strings/str_cat.h"
#include "link/text.h"

namespace drover {
namespace {

constexpr std::size_t kLongestName = 64;

bool is_alphanumeric(char c) { return absl::ascii_isalnum(static_cast<unsigned char>(c)); }

std::string folder_in(const char* variable) {
  const char* const value = std::getenv(variable);
  return value != nullptr && value[0] == '/' ? value : "";
}

}  // namespace

absl::Status check_worker_name(const std::string& name) {
  const bool fits = !name.empty() && name.size() <= kLongestName && is_alphanumeric(name.front()) &&
                    std::all_of(name.begin(), name.end(),
                                [](char c) { return is_alphanumeric(c) || c == '.' || c == '_' || c == '-'; });
  if (fits) return absl::OkStatus();
  return absl::InvalidArgumentError(absl::StrCat("--name \"", link::printable(name), "\": a worker's name has 1 to ",
                                                 kLongestName,
                                                 " letters, digits, dots, dashes or underscores, and begins with a "
                                                 "letter or a digit"));
}

absl::StatusOr<std::string> default_spool(const std::string& name) {
  std::string state = folder_in("XDG_STATE_HOME");
  if (const std::string home = folder_in("HOME"); state.empty() && !home.empty()) state = home + "/.local/state";
  if (!state.empty()) return absl::StrCat(state, "/drover/worker-", name);
  return absl::FailedPreconditionError(
      "there is neither XDG_STATE_HOME nor HOME to keep the spool in; name a folder "
      "with --spool");
}

absl::StatusOr<std::string> sister_program(const std::string& name) {
  std::error_code error;
  const std::filesystem::path self = std::filesystem::read_symlink("/proc/self/exe", error);
  const std::string path = (self.parent_path() / name).string();
  if (!error && access(path.c_str(), X_OK) == 0) return path;
  return absl::NotFoundError(absl::StrCat(path, " is not there or cannot be run; name it with --runner"));
}

std::string absolute_path(const std::string& path) {
  std::error_code error;
  const std::filesystem::path whole = std::filesystem::absolute(path, error);
  return error ? path : whole.lexically_normal().string();
}

}  // namespace drover
