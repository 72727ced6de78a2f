#include "study/names.h"

#include <gtest/gtest.h>

namespace drover::study {
namespace {

TEST(Names, AreAsFarApartAsTheEditsBetweenThem) {
  EXPECT_EQ(edit_distance("peak", "peak"), 0);
  EXPECT_EQ(edit_distance("peak", "paek"), 1) << "a swap of neighbours is one slip (Damerau 1964)";
  EXPECT_EQ(edit_distance("kitten", "sitting"), 3) << "the textbook example, from memory";
  EXPECT_EQ(edit_distance("", "abc"), 3);
}

TEST(Names, HaveANearestOnlyWhenItIsNear) {
  const std::vector<std::string> known = {"diameter", "wall", "steel"};
  EXPECT_EQ(nearest("diamter", known), "diameter");
  EXPECT_EQ(nearest("WALL", known), "wall");
  EXPECT_EQ(nearest("pressure", known), "");
}

TEST(Names, ThatAFormulaCanUseAreIdentifiers) {
  for (const char* const name : {"x", "_x", "peak_pressure2"}) EXPECT_TRUE(is_identifier(name)) << name;
  for (const char* const name : {"", "2x", "a-b", "a b", "größe"}) EXPECT_FALSE(is_identifier(name)) << name;
}

}  // namespace
}  // namespace drover::study
