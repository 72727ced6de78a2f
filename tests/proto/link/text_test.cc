#include "link/text.h"

#include <gtest/gtest.h>

#include <string>
#include <vector>

namespace drover::link {
namespace {

const std::string kBad = "\xEF\xBF\xBD";

struct Row {
  std::string name, bytes, text;
};

TEST(CleanUtf8, KeepsWhatIsValidAndReplacesEachByteThatIsNot) {
  // Which sequences are well formed: The Unicode Standard 15.0, table 3-7.
  const std::vector<Row> rows = {
      {"empty", "", ""},
      {"plain", "solver: 3 %\n", "solver: 3 %\n"},
      {"zero byte", std::string("a\0b", 3), std::string("a\0b", 3)},
      {"two bytes", "\xC3\xA9", "\xC3\xA9"},
      {"three bytes", "\xE2\x82\xAC", "\xE2\x82\xAC"},
      {"four bytes", "\xF0\x9F\x90\x8E", "\xF0\x9F\x90\x8E"},
      {"last code point", "\xF4\x8F\xBF\xBF", "\xF4\x8F\xBF\xBF"},
      {"Latin 1", "caf\xE9!", "caf" + kBad + "!"},
      {"lone follower", "\x80", kBad},
      {"overlong two", "\xC0\xAF", kBad + kBad},
      {"overlong three", "\xE0\x80\xAF", kBad + kBad + kBad},
      {"overlong four", "\xF0\x80\x80\xAF", kBad + kBad + kBad + kBad},
      {"surrogate", "\xED\xA0\x80", kBad + kBad + kBad},
      {"beyond the last", "\xF4\x90\x80\x80", kBad + kBad + kBad + kBad},
      {"cut in the middle", "a\xE2\x82", "a" + kBad + kBad},
      {"cut, then plain", "\xE2z", kBad + "z"},
      {"never a byte", "\xFE\xFF", kBad + kBad},
  };
  for (const Row& row : rows) {
    EXPECT_EQ(clean_utf8(row.bytes), row.text) << row.name;
    EXPECT_EQ(clean_utf8(row.text), row.text) << row.name << ", a second time";
  }
}

TEST(Printable, ShowsControlCharactersAsEscapes) {
  const std::vector<Row> rows = {
      {"plain", "run 41 \xC3\xA9", "run 41 \xC3\xA9"},
      {"terminal escape", "\x1b[31mred", "\\x1b[31mred"},
      {"line end", "a\nb\r\n", "a\\x0ab\\x0d\\x0a"},
      {"tab and delete", "\t\x7f", "\\x09\\x7f"},
      {"zero", std::string(1, '\0'), "\\x00"},
      {"C1 control", "\xC2\x9B", "\\x9b"},
      {"no-break space stays", "\xC2\xA0", "\xC2\xA0"},
      {"right-to-left override", "\xE2\x80\xAEtxt", "\\u{202e}txt"},
      {"isolate", "\xE2\x81\xA6", "\\u{2066}"},
      {"Arabic letter mark", "\xD8\x9C", "\\u{061c}"},
      {"invalid", "\xFF", kBad},
  };
  for (const Row& row : rows) EXPECT_EQ(printable(row.bytes), row.text) << row.name;
}

TEST(Printable, KeepsLinesWhenAsked) {
  EXPECT_EQ(printable("a\nb\x1b\n", true), "a\nb\\x1b\n");
  EXPECT_EQ(printable("a\rb", true), "a\\x0db") << "a bare return would overwrite the line";
}

}  // namespace
}  // namespace drover::link
