#include "record.h"

#include <fcntl.h>
#include <unistd.h>

#include <cerrno>
#include <cstdio>
#include <cstring>

namespace drover::runner {

Record::Record() { add("format", 1LL); }

void Record::add(const char* key, long long value) {
  char text[32];
  std::snprintf(text, sizeof(text), "%lld", value);
  append(key, text);
}

void Record::add(const char* key, const char* value) { append(key, value); }

// All keys together stay far below the buffer.
void Record::append(const char* key, const char* value) {
  const int written = std::snprintf(text_ + size_, sizeof(text_) - size_, "%s %s\n", key, value);
  if (written > 0) size_ += static_cast<std::size_t>(written);
  if (size_ >= sizeof(text_)) size_ = sizeof(text_) - 1;
}

int Record::write(int folder, const char* name) {
  const std::size_t body = size_;
  append("end", "");
  char temporary[64];
  std::snprintf(temporary, sizeof(temporary), "%s.new", name);
  const int file = openat(folder, temporary, O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC | O_NOFOLLOW, 0600);
  int error = file < 0 ? errno : 0;
  for (std::size_t done = 0; error == 0 && done < size_;) {
    const ssize_t written = ::write(file, text_ + done, size_ - done);
    if (written < 0 && errno != EINTR) error = errno;
    if (written > 0) done += static_cast<std::size_t>(written);
  }
  if (error == 0 && fsync(file) != 0) error = errno;
  if (file >= 0) close(file);
  if (error == 0 && renameat(folder, temporary, folder, name) != 0) error = errno;
  if (error == 0 && fsync(folder) != 0) error = errno;
  size_ = body;
  return error;
}

}  // namespace drover::runner
