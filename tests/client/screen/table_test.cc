#include "screen/table.h"

#include <gtest/gtest.h>

namespace drover::screen {
namespace {

TEST(Table, PutsNumbersToTheRightAndTextsToTheLeft) {
  Table table({{"name"}, {"runs", Align::kRight}, {"state"}});
  table.add({"penstock", "5", "active"});
  table.add({"b", "12,345", "paused"});
  EXPECT_EQ(table.text(),
            "name        runs  state\n"
            "penstock       5  active\n"
            "b         12,345  paused\n");
}

TEST(Table, CountsCharactersAndNotBytes) {
  Table table({{""}, {""}});
  table.add({"°C", "x"});
  table.add({"abc", "y"});
  EXPECT_EQ(table.text(2), "  °C   x\n  abc  y\n");
}

TEST(Table, FillsMissingCellsAndShowsControlCharactersAsEscapes) {
  Table table({{"a"}, {"b"}});
  table.add({"x\x1b[2J"});
  EXPECT_EQ(table.text().find('\x1b'), std::string::npos);
  EXPECT_FALSE(table.empty());
}

}  // namespace
}  // namespace drover::screen
