#include "output_cap.h"

#include <fcntl.h>
#include <linux/falloc.h>
#include <sys/stat.h>
#include <unistd.h>

namespace drover::runner {
namespace {

constexpr long long kBlock = 4096;

}  // namespace

void OutputCap::check() {
  struct stat info {};
  if (file_ < 0 || fstat(file_, &info) != 0 || info.st_size <= cap_) return;
  const long long head = (cap_ / 2 + kBlock - 1) / kBlock * kBlock;
  const long long until = (info.st_size - cap_ / 2) / kBlock * kBlock;
  const long long from = freed_to_ > head ? freed_to_ : head;
  if (until <= from) return;
  if (fallocate(file_, FALLOC_FL_PUNCH_HOLE | FALLOC_FL_KEEP_SIZE, from, until - from) == 0) {
    freed_to_ = until;
    return;
  }
  // No holes on this file system. The writer appends, so it goes on at the new end.
  if (ftruncate(file_, head) == 0) freed_to_ = 0;
}

}  // namespace drover::runner
