#include "commands/data_folder.h"

#include <fcntl.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cerrno>
#include <cstdint>
#include <cstdlib>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <system_error>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_format.h"
#include "link/address.h"

namespace drover::commands {
namespace {

absl::Status failed(const std::string& what, int error) {
  return absl::FailedPreconditionError(absl::StrCat(what, ": ", std::strerror(error)));
}

std::string holder_of(const std::string& lock_file) {
  std::ifstream in(lock_file);
  long pid = 0;
  return in >> pid ? absl::StrCat(" (process ", pid, ")") : "";
}

// The descriptor of the held lock.
absl::StatusOr<int> take_lock(const std::string& folder) {
  const std::string path = folder + "/lock";
  const int descriptor = ::open(path.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, 0600);
  if (descriptor < 0) return failed(absl::StrCat("the lock ", path, " cannot be opened"), errno);
  if (::flock(descriptor, LOCK_EX | LOCK_NB) != 0) {
    const int error = errno;
    ::close(descriptor);
    if (error != EWOULDBLOCK) return failed(absl::StrCat(path, " cannot be locked"), error);
    return absl::FailedPreconditionError(absl::StrCat("another drover solo", holder_of(path), " works in ", folder,
                                                      "; wait for it, or give this one a folder with --data"));
  }
  // Only for the message above; the lock itself is the kernel's.
  const std::string pid = absl::StrCat(::getpid(), "\n");
  const bool written = ::ftruncate(descriptor, 0) == 0 &&
                       ::pwrite(descriptor, pid.data(), pid.size(), 0) == static_cast<ssize_t>(pid.size());
  if (written) return descriptor;
  const int error = errno;
  ::close(descriptor);
  return failed(absl::StrCat(path, " cannot be written"), error);
}

// FNV-1a: short, and the same in every process.
std::uint64_t hash(const std::string& text) {
  std::uint64_t value = 14695981039346656037ull;
  for (const char c : text) value = (value ^ static_cast<unsigned char>(c)) * 1099511628211ull;
  return value;
}

}  // namespace

absl::StatusOr<std::unique_ptr<DataFolder>> DataFolder::open(const std::string& path) {
  if (::mkdir(path.c_str(), 0700) != 0 && errno != EEXIST) {
    return failed(absl::StrCat("the data folder ", path, " cannot be made"), errno);
  }
  std::error_code error;
  const std::filesystem::path whole = std::filesystem::canonical(path, error);
  if (error) return failed(absl::StrCat("the data folder ", path, " cannot be used"), error.value());
  if (!std::filesystem::is_directory(whole, error)) {
    return absl::FailedPreconditionError(absl::StrCat(path, " is no folder; give another one with --data"));
  }
  auto lock = take_lock(whole.string());
  if (!lock.ok()) return lock.status();
  return std::unique_ptr<DataFolder>(new DataFolder(whole.string(), *lock, false));
}

absl::StatusOr<std::unique_ptr<DataFolder>> DataFolder::temporary() {
  std::error_code error;
  std::string path = (std::filesystem::temp_directory_path(error) / "drover-XXXXXX").string();
  if (error || ::mkdtemp(path.data()) == nullptr) return failed("no temporary folder can be made", errno);
  auto folder = open(path);
  if (folder.ok()) (*folder)->passing_ = true;
  return folder;
}

DataFolder::~DataFolder() {
  std::error_code ignored;
  if (passing_) std::filesystem::remove_all(path_, ignored);
  ::close(lock_);
}

std::string DataFolder::socket_address() const {
  const std::string here = absl::StrCat("unix:", path_, "/run/coordinator");
  if (link::Address::parse(here).ok()) return here;
  const std::string elsewhere = link::default_address();
  return absl::StrCat(elsewhere.substr(0, elsewhere.rfind('/')), "/solo-", absl::StrFormat("%016x", hash(path_)));
}

}  // namespace drover::commands
