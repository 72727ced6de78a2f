#include "commands/new_file.h"

#include <fcntl.h>
#include <unistd.h>

#include <cerrno>
#include <cstdio>
#include <cstring>

#include "absl/strings/str_cat.h"

namespace drover::commands {
namespace {

absl::Status failed(const std::string& path, int error) {
  return absl::Status(absl::ErrnoToStatusCode(error),
                      absl::StrCat(path, ": the file cannot be written: ", std::strerror(error)));
}

int write_all(int descriptor, std::string_view bytes) {
  while (!bytes.empty()) {
    const ssize_t count = ::write(descriptor, bytes.data(), bytes.size());
    if (count < 0 && errno == EINTR) continue;
    if (count < 0) return errno;
    bytes.remove_prefix(static_cast<std::size_t>(count));
  }
  return ::fsync(descriptor) == 0 ? 0 : errno;
}

}  // namespace

absl::Status write_file(const std::string& path, std::string_view bytes) {
  const std::string temporary = absl::StrCat(path, ".", ::getpid(), ".new");
  const int descriptor = ::open(temporary.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0666);
  if (descriptor < 0) return failed(path, errno);
  int error = write_all(descriptor, bytes);
  if (::close(descriptor) != 0 && error == 0) error = errno;
  if (error == 0 && std::rename(temporary.c_str(), path.c_str()) != 0) error = errno;
  if (error == 0) return absl::OkStatus();
  ::unlink(temporary.c_str());
  return failed(path, error);
}

}  // namespace drover::commands
