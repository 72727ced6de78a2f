// Keeps a file that somebody else writes within bounds: its head and its tail stay, the middle is given back to the
// disk. The writer is never slowed or told.
#pragma once

namespace drover::runner {

class OutputCap {
 public:
  // `file` is open for writing and stays so.
  OutputCap(int file, long long cap_bytes) : file_(file), cap_(cap_bytes) {}
  void check();

 private:
  int file_;
  long long cap_;
  long long freed_to_ = 0;  // from the head on
};

}  // namespace drover::runner
