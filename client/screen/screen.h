// What a stream can show, and text in colour where it can.
#pragma once

#include <string>
#include <string_view>

namespace drover::screen {

// Who asks, so that tests need no terminal.
struct Surroundings {
  bool terminal = false;
  const char* no_colour = nullptr;  // $NO_COLOR; null: unset
  const char* term = nullptr;       // $TERM
  static Surroundings of(int descriptor);
};

struct Screen {
  bool colour = false;  // a terminal that is not dumb, and NO_COLOR is unset or empty
  bool live = false;    // lines can be rewritten: a terminal that is not dumb, and no --json

  static Screen of(const Surroundings& surroundings, bool json);

  // `text` as it is, unless there is colour.
  std::string strong(std::string_view text) const;
  std::string faint(std::string_view text) const;
  std::string good(std::string_view text) const;
  std::string bad(std::string_view text) const;
};

// Columns of the terminal at `descriptor`; 80 where it does not say.
int width_of(int descriptor);

}  // namespace drover::screen
