#include "penstock/deck.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <string>
#include <variant>

#include "reference/penstock/demo_deck.h"

namespace penstock {
namespace {

using testing::HasSubstr;

int line_of(const std::string& text, const std::string& part) {
  return 1 + static_cast<int>(std::count(text.begin(), text.begin() + static_cast<long>(text.find(part)), '\n'));
}

TEST(Deck, IsReadInTheUnitsOfItsCards) {
  const Case c = demo_case({{"diameter", " 4.32100e-01"}, {"jets", "3"}, {"steel", "S355"}});

  EXPECT_EQ(c.diameter_m, 0.4321);
  EXPECT_EQ(c.jets, 3);
  EXPECT_EQ(c.grade().yield_mpa, 355);
  EXPECT_EQ(c.grade().price_per_kg, 3.45);
  EXPECT_EQ(c.generator_efficiency, 0.95);  // its keyword fills all of the twenty columns
  EXPECT_EQ(c.profile.size(), 6u);
  EXPECT_EQ(c.length_m(), 1200);
  EXPECT_NEAR(c.elevation_m(350), 598.5, 1e-12);
  EXPECT_TRUE(c.anchored);
}

TEST(Deck, TakesAWholeNumberInAnyOfItsSpellings) {
  for (const char* three : {"3", "+3", "3.0", "3.00000E+00", " 3 "}) {
    EXPECT_EQ(demo_case({{"jets", three}}).jets, 3) << three;
  }
}

TEST(Deck, MayEndItsLinesInCrLfAndGoOnBehindTheEnd) {
  std::string deck = demo_deck() + "anything\n";
  for (auto at = deck.find('\n'); at != std::string::npos; at = deck.find('\n', at + 2)) deck.replace(at, 1, "\r\n");

  const auto read = read_deck(deck);

  ASSERT_TRUE(std::holds_alternative<Case>(read));
  EXPECT_EQ(std::get<Case>(read).diameter_m, 0.5);
  EXPECT_EQ(std::get<Case>(read).title, "ALDERBECK PENSTOCK, LOAD REJECTION");
}

struct Mistake {
  const char* name;
  const char* from;
  const char* to;
  const char* message;
};

TEST(Deck, TellsTheLineOfAMistake) {
  const Mistake mistakes[] = {
      {"unknown keyword", "PIPE ROUGHNESS      0.05", "PIPE ROUGHNES       0.05", "unknown card \"PIPE ROUGHNES\""},
      {"value too far left", "RATED FLOW          0.40", "RATED FLOW     0.40", "unknown card \"RATED FLOW     0.40\""},
      {"no value", "ATMOSPHERE          95.0", "ATMOSPHERE", "\"ATMOSPHERE\" takes one number"},
      {"two values", "ATMOSPHERE          95.0", "ATMOSPHERE          95.0 2", "\"ATMOSPHERE\" takes one number"},
      {"a word", "ATMOSPHERE          95.0", "ATMOSPHERE          high", "\"high\" of card \"ATMOSPHERE\" is not a"},
      {"trailing letters", "ATMOSPHERE          95.0", "ATMOSPHERE          95.0kPa", "is not a number"},
      {"not finite", "ATMOSPHERE          95.0", "ATMOSPHERE          nan", "\"nan\" of card \"ATMOSPHERE\" is not a"},
      {"a mark left", "PIPE WALL           9.0", "PIPE WALL           [=wall=]", "\"[=wall=]\" of card"},
      {"too large", "ATMOSPHERE          95.0", "ATMOSPHERE          95000", "is outside 30 to 120"},
      {"half a jet", "JETS                2", "JETS                2.5", "\"2.5\" of card \"JETS\" is not a whole"},
      {"no jet", "JETS                2", "JETS                0", "\"0\" of card \"JETS\" is outside 1 to 6"},
      {"twice", "PIPE POISSON        0.30", "PIPE WALL           9.0", "card \"PIPE WALL\" is given twice"},
      {"anchored", "PIPE ANCHORED       YES", "PIPE ANCHORED       MAYBE", "takes YES or NO"},
      {"profile", "PROFILE             800.0    455.0", "PROFILE             800.0", "takes two numbers"},
      {"stations fall", "PROFILE             800.0 ", "PROFILE             400.0 ", "begin at 0 and rise"},
      {"stations begin late", "PROFILE             0.0 ", "PROFILE             1.0 ", "begin at 0 and rise"},
      {"steel", "S355     355.0    3.45", "S355     355.0", "takes a grade"},
      {"steel twice", "S355     355.0", "S235     355.0", "grade \"S235\" is given twice"},
  };

  for (const Mistake& mistake : mistakes) {
    const std::string deck = with(demo_deck(), mistake.from, mistake.to);
    const int line = line_of(demo_deck(), mistake.from);

    const auto read = read_deck(deck);

    ASSERT_TRUE(std::holds_alternative<DeckError>(read)) << mistake.name;
    // The card that is given twice is the second one.
    EXPECT_EQ(std::get<DeckError>(read).line, line) << mistake.name;
    EXPECT_THAT(std::get<DeckError>(read).message, HasSubstr(mistake.message)) << mistake.name;
  }
}

TEST(Deck, TellsWhatIsMissingAtItsEnd) {
  const Mistake mistakes[] = {
      {"a number", "LIFE YEARS          40.0\n", "", "card \"LIFE YEARS\" is missing"},
      {"a count", "GRID REACHES        120\n", "", "card \"GRID REACHES\" is missing"},
      {"a text", "PIPE ANCHORED       YES\n", "", "card \"PIPE ANCHORED\" is missing"},
      {"the end", "END\n", "", "card \"END\" is missing"},
      {"a grade", "PIPE STEEL          S235", "PIPE STEEL          S999", "no card \"STEEL\" gives grade \"S999\""},
      {"a wall", "PIPE WALL           9.0", "PIPE WALL           2.0", "leaves nothing of \"PIPE WALL\""},
      {"water", "RESERVOIR LEVEL     620.0", "RESERVOIR LEVEL     605.0", "rises above \"RESERVOIR LEVEL\""},
  };

  for (const Mistake& mistake : mistakes) {
    const std::string deck = with(demo_deck(), mistake.from, mistake.to);

    const auto read = read_deck(deck);

    ASSERT_TRUE(std::holds_alternative<DeckError>(read)) << mistake.name;
    EXPECT_EQ(std::get<DeckError>(read).line, std::count(deck.begin(), deck.end(), '\n')) << mistake.name;
    EXPECT_THAT(std::get<DeckError>(read).message, HasSubstr(mistake.message)) << mistake.name;
  }
}

TEST(Deck, IsRefusedWhenEmptyOrBinary) {
  for (const std::string& text : {std::string(), std::string("\n\n"), std::string("\0\1\xff", 3)}) {
    EXPECT_TRUE(std::holds_alternative<DeckError>(read_deck(text)));
  }
}

}  // namespace
}  // namespace penstock
