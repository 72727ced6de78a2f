#include "screen/screen.h"

#include <gtest/gtest.h>

namespace drover::screen {
namespace {

TEST(Screen, HasColourAndALiveLineOnATerminal) {
  const Screen screen = Screen::of({.terminal = true, .no_colour = nullptr, .term = "xterm"}, false);
  EXPECT_TRUE(screen.colour);
  EXPECT_TRUE(screen.live);
  EXPECT_EQ(screen.bad("x"), "\x1b[31mx\x1b[0m");
}

TEST(Screen, IsPlainOffATerminalAndOnADumbOne) {
  for (const auto& surroundings : {Surroundings{.terminal = false, .no_colour = nullptr, .term = "xterm"},
                                   Surroundings{.terminal = true, .no_colour = nullptr, .term = "dumb"}}) {
    const Screen screen = Screen::of(surroundings, false);
    EXPECT_FALSE(screen.colour);
    EXPECT_FALSE(screen.live);
    EXPECT_EQ(screen.strong("x"), "x");
  }
}

TEST(Screen, HonoursNoColourUnlessItIsEmpty) {
  const Screen refused = Screen::of({.terminal = true, .no_colour = "1", .term = "xterm"}, false);
  EXPECT_FALSE(refused.colour);
  EXPECT_TRUE(refused.live);
  EXPECT_TRUE(Screen::of({.terminal = true, .no_colour = "", .term = "xterm"}, false).colour);
}

TEST(Screen, HasNoLiveLineWithJson) {
  EXPECT_FALSE(Screen::of({.terminal = true, .no_colour = nullptr, .term = "xterm"}, true).live);
}

}  // namespace
}  // namespace drover::screen
