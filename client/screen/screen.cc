#include "screen/screen.h"

#include <sys/ioctl.h>
#include <unistd.h>

#include <cstdlib>

namespace drover::screen {
namespace {

std::string in_colour(bool colour, const char* code, std::string_view text) {
  if (!colour) return std::string(text);
  return std::string("\x1b[").append(code).append("m").append(text).append("\x1b[0m");
}

}  // namespace

Surroundings Surroundings::of(int descriptor) {
  return {.terminal = isatty(descriptor) != 0, .no_colour = std::getenv("NO_COLOR"), .term = std::getenv("TERM")};
}

Screen Screen::of(const Surroundings& surroundings, bool json) {
  const bool dumb = surroundings.term != nullptr && std::string_view(surroundings.term) == "dumb";
  const bool able = surroundings.terminal && !dumb;
  const bool refused = surroundings.no_colour != nullptr && *surroundings.no_colour != '\0';
  return {.colour = able && !refused, .live = able && !json};
}

std::string Screen::strong(std::string_view text) const { return in_colour(colour, "1", text); }
std::string Screen::faint(std::string_view text) const { return in_colour(colour, "2", text); }
std::string Screen::good(std::string_view text) const { return in_colour(colour, "32", text); }
std::string Screen::bad(std::string_view text) const { return in_colour(colour, "31", text); }

int width_of(int descriptor) {
  constexpr int kUsual = 80;
  winsize size{};
  if (ioctl(descriptor, TIOCGWINSZ, &size) != 0 || size.ws_col == 0) return kUsual;
  return size.ws_col;
}

}  // namespace drover::screen
