// The records a runner leaves: short texts, one `key value` a line, the last line `end`, so that half a record shows.
#pragma once

#include <cstddef>

namespace drover::runner {

class Record {
 public:
  Record();  // with its format line
  void add(const char* key, long long value);
  void add(const char* key, const char* value);
  // Temporary name, sync, rename, sync of the folder. 0, or the errno of what failed; nothing is there under `name`
  // then.
  int write(int folder, const char* name);

 private:
  void append(const char* key, const char* value);
  char text_[2048];
  std::size_t size_ = 0;
};

}  // namespace drover::runner
