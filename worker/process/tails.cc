#include "process/tails.h"

#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>

namespace drover::process {

std::string read_tail(const std::string& path, std::size_t most) {
  const int file = open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NOFOLLOW | O_NONBLOCK);
  if (file < 0) return {};
  struct stat info {};
  std::string tail;
  if (fstat(file, &info) == 0 && S_ISREG(info.st_mode)) {
    const auto size = static_cast<std::size_t>(info.st_size);
    tail.resize(std::min(size, most));
    const ssize_t got = pread(file, tail.data(), tail.size(), static_cast<off_t>(size - tail.size()));
    tail.resize(got > 0 ? static_cast<std::size_t>(got) : 0);
  }
  close(file);
  return tail;
}

}  // namespace drover::process
