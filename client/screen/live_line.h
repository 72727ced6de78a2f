// One line that tells how far something is: rewritten in place on a terminal, elsewhere a plain line now and then.
#pragma once

#include <cstdio>
#include <optional>
#include <string>
#include <string_view>

#include "absl/time/time.h"
#include "screen/screen.h"

namespace drover::screen {

// Not thread-safe. Write errors are ignored: progress that nobody reads is no reason to stop.
class LiveLine {
 public:
  // `every`: at least this long between plain lines. The stream must outlive this object.
  LiveLine(std::FILE* stream, Screen screen, int columns, absl::Duration every = absl::Seconds(30))
      : stream_(stream), screen_(screen), columns_(columns), every_(every) {}
  ~LiveLine() { clear(); }
  LiveLine(const LiveLine&) = delete;
  LiveLine& operator=(const LiveLine&) = delete;

  // `now` is of a steady clock. On a terminal the text is cut to its width; elsewhere it is printed when it differs
  // from the last one and `every` is over.
  void show(const std::string& text, absl::Duration now);
  // A line that stays, above the live one.
  void print(std::string_view line);
  // Takes the live line off the screen.
  void clear();

 private:
  std::FILE* stream_;
  Screen screen_;
  int columns_;
  absl::Duration every_;
  std::optional<absl::Duration> printed_;
  std::string shown_;
};

}  // namespace drover::screen
