#include "studyfile/nearest.h"

#include <gtest/gtest.h>

#include <string>
#include <vector>

namespace drover::studyfile {
namespace {

TEST(Slips, CountsEachKindOfSlipOnce) {
  EXPECT_EQ(slips("", ""), 0);
  EXPECT_EQ(slips("low", "low"), 0);
  EXPECT_EQ(slips("lo", "low"), 1);    // left out
  EXPECT_EQ(slips("loww", "low"), 1);  // put in
  EXPECT_EQ(slips("lox", "low"), 1);   // changed
  EXPECT_EQ(slips("olw", "low"), 1);   // swapped
  EXPECT_EQ(slips("", "low"), 3);
  EXPECT_EQ(slips("ca", "abc"), 3);  // the restricted form edits no part twice; common practice, no source
}

TEST(Nearest, FindsTheWordThatWasMeant) {
  const std::vector<std::string> known = {"name", "kind", "low", "high", "minimise", "maximise"};
  EXPECT_EQ(nearest("minimize", known), "minimise");
  EXPECT_EQ(nearest("Hihg", known), "high");
  EXPECT_EQ(nearest("LOW", known), "low");
}

TEST(Nearest, GivesNothingWhereNothingIsNear) {
  const std::vector<std::string> known = {"name", "kind", "low", "high"};
  EXPECT_EQ(nearest("elephant", known), "");
  EXPECT_EQ(nearest("", known), "");
  EXPECT_EQ(nearest(std::string(10'000, 'x'), known), "");
  EXPECT_EQ(nearest("low", {}), "");
}

}  // namespace
}  // namespace drover::studyfile
