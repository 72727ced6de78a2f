#include "process/files.h"

#include <dirent.h>
#include <fcntl.h>
#include <sys/stat.h>
#include <sys/statvfs.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <cerrno>
#include <cstring>

#include "absl/strings/str_cat.h"
#include "status/try.h"

namespace drover::process {
namespace {

absl::Status errno_status(const std::string& path, int error = errno) {
  const std::string text = absl::StrCat(path, ": ", std::strerror(error));
  switch (error) {
    case ENOSPC:
    case EDQUOT:
      return absl::ResourceExhaustedError(text);
    case ENOENT:
      return absl::NotFoundError(text);
    case EACCES:
    case EPERM:
    case EROFS:
      return absl::PermissionDeniedError(text);
    default:
      return absl::UnavailableError(text);
  }
}

std::string parent_of(const std::string& path) {
  const std::size_t slash = path.find_last_of('/');
  if (slash == std::string::npos) return ".";
  return slash == 0 ? "/" : path.substr(0, slash);
}

class Descriptor {
 public:
  explicit Descriptor(int value) : value_(value) {}
  Descriptor(const Descriptor&) = delete;
  Descriptor& operator=(const Descriptor&) = delete;
  ~Descriptor() {
    if (value_ >= 0) close(value_);
  }
  int get() const { return value_; }
  bool ok() const { return value_ >= 0; }

 private:
  int value_;
};

absl::Status sync_folder(const std::string& folder) {
  const Descriptor opened(open(folder.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC));
  if (!opened.ok() || fsync(opened.get()) != 0) return errno_status(folder);
  return absl::OkStatus();
}

absl::Status write_all(const std::string& path, std::string_view bytes) {
  const Descriptor file(open(path.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC | O_NOFOLLOW, 0600));
  if (!file.ok()) return errno_status(path);
  while (!bytes.empty()) {
    const ssize_t written = write(file.get(), bytes.data(), bytes.size());
    if (written < 0 && errno == EINTR) continue;
    if (written < 0) return errno_status(path);
    bytes.remove_prefix(static_cast<std::size_t>(written));
  }
  return fsync(file.get()) == 0 ? absl::OkStatus() : errno_status(path);
}

// Removes all in an open folder, which is closed with it.
absl::Status empty_folder(int folder, const std::string& path) {
  DIR* const entries = fdopendir(folder);
  if (entries == nullptr) {
    const int error = errno;
    close(folder);
    return errno_status(path, error);
  }
  absl::Status done;
  while (const dirent* const entry = readdir(entries)) {
    const std::string name = entry->d_name;
    if (name == "." || name == "..") continue;
    const std::string below = absl::StrCat(path, "/", name);
    if (unlinkat(dirfd(entries), name.c_str(), 0) == 0 || errno == ENOENT) continue;
    const int inner = openat(dirfd(entries), name.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC | O_NOFOLLOW);
    if (inner < 0) {
      done.Update(errno_status(below));
      continue;
    }
    fchmod(inner, 0700);  // a simulation may have taken its own rights away
    done.Update(empty_folder(inner, below));
    if (unlinkat(dirfd(entries), name.c_str(), AT_REMOVEDIR) != 0 && errno != ENOENT) done.Update(errno_status(below));
  }
  closedir(entries);
  return done;
}

}  // namespace

absl::Status RealFiles::write_durably(const std::string& path, std::string_view bytes) {
  const std::string temporary = absl::StrCat(path, ".new");
  absl::Status written = write_all(temporary, bytes);
  if (written.ok() && rename(temporary.c_str(), path.c_str()) != 0) written = errno_status(path);
  if (!written.ok()) {
    unlink(temporary.c_str());
    return written;
  }
  return sync_folder(parent_of(path));
}

absl::StatusOr<std::string> RealFiles::read(const std::string& path) const {
  const Descriptor file(open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NOFOLLOW));
  if (!file.ok()) return errno_status(path);
  std::string bytes;
  std::array<char, 16384> block{};
  while (true) {
    const ssize_t size = ::read(file.get(), block.data(), block.size());
    if (size < 0 && errno == EINTR) continue;
    if (size < 0) return errno_status(path);
    if (size == 0) return bytes;
    bytes.append(block.data(), static_cast<std::size_t>(size));
  }
}

absl::StatusOr<std::vector<std::string>> RealFiles::list(const std::string& folder) const {
  DIR* const entries = opendir(folder.c_str());
  if (entries == nullptr) return errno_status(folder);
  std::vector<std::string> names;
  while (const dirent* const entry = readdir(entries)) {
    const std::string name = entry->d_name;
    if (name != "." && name != "..") names.push_back(name);
  }
  closedir(entries);
  std::sort(names.begin(), names.end());
  return names;
}

absl::Status RealFiles::make_folder(const std::string& path) {
  if (mkdir(path.c_str(), 0700) == 0) return sync_folder(parent_of(path));
  const int error = errno;
  if (error == ENOENT && parent_of(path) != path) {
    DROVER_TRY(make_folder(parent_of(path)));
    if (mkdir(path.c_str(), 0700) == 0) return sync_folder(parent_of(path));
    return errno_status(path);
  }
  struct stat info {};
  if (error == EEXIST && stat(path.c_str(), &info) == 0 && S_ISDIR(info.st_mode)) return absl::OkStatus();
  return errno_status(path, error);
}

absl::Status RealFiles::remove_tree(const std::string& path) {
  const int folder = open(path.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC | O_NOFOLLOW);
  if (folder < 0 && errno == ENOENT) return absl::OkStatus();
  if (folder < 0) return unlink(path.c_str()) == 0 ? absl::OkStatus() : errno_status(path);  // a file or a link
  fchmod(folder, 0700);
  DROVER_TRY(empty_folder(folder, path));
  if (rmdir(path.c_str()) != 0 && errno != ENOENT) return errno_status(path);
  return absl::OkStatus();
}

bool RealFiles::exists(const std::string& path) const { return access(path.c_str(), F_OK) == 0; }

absl::StatusOr<std::int64_t> RealFiles::free_bytes(const std::string& folder) const {
  struct statvfs info {};
  if (statvfs(folder.c_str(), &info) != 0) return errno_status(folder);
  return static_cast<std::int64_t>(info.f_bavail) * static_cast<std::int64_t>(info.f_frsize);
}

}  // namespace drover::process
