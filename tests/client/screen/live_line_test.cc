#include "screen/live_line.h"

#include <gtest/gtest.h>

#include <cstdlib>
#include <functional>
#include <string>

namespace drover::screen {
namespace {

std::string written(const std::function<void(std::FILE*)>& story) {
  char* bytes = nullptr;
  std::size_t size = 0;
  std::FILE* stream = open_memstream(&bytes, &size);
  story(stream);
  std::fclose(stream);
  std::string text(bytes, size);
  std::free(bytes);
  return text;
}

const Screen kTerminal{.colour = false, .live = true};
const Screen kFile{.colour = false, .live = false};

TEST(LiveLine, IsRewrittenInPlaceOnATerminal) {
  EXPECT_EQ(written([](std::FILE* stream) {
              LiveLine line(stream, kTerminal, 80);
              line.show("one", absl::Seconds(0));
              line.show("one", absl::Seconds(1));
              line.show("two", absl::Seconds(2));
            }),
            "\rone\x1b[K\rtwo\x1b[K\r\x1b[K");
}

TEST(LiveLine, IsCutToTheWidthOfTheTerminal) {
  EXPECT_EQ(written([](std::FILE* stream) {
              LiveLine line(stream, kTerminal, 5);
              line.show("°°°°°°°°", absl::Seconds(0));
            }),
            "\r°°°°\x1b[K\r\x1b[K");
}

TEST(LiveLine, IsAPlainLineNowAndThenElsewhere) {
  EXPECT_EQ(written([](std::FILE* stream) {
              LiveLine line(stream, kFile, 80, absl::Seconds(10));
              line.show("one", absl::Seconds(0));
              line.show("two", absl::Seconds(9));
              line.show("three", absl::Seconds(10));
              line.show("three", absl::Seconds(30));
            }),
            "one\nthree\n");
}

TEST(LiveLine, LetsLinesThatStayGoAboveIt) {
  EXPECT_EQ(written([](std::FILE* stream) {
              LiveLine line(stream, kTerminal, 80);
              line.show("live", absl::Seconds(0));
              line.print("stays");
            }),
            "\rlive\x1b[K\r\x1b[Kstays\n\rlive\x1b[K\r\x1b[K");
}

}  // namespace
}  // namespace drover::screen
