#include "code/number.h"

#include <gtest/gtest.h>

#include <cmath>
#include <random>
#include <string>

namespace drover::code {
namespace {

struct Row {
  const char* text;
  double value;
  std::size_t length;
};

TEST(Number, IsReadAsCodesWriteIt) {
  // Fortran's forms: ISO/IEC 1539-1, edit descriptors E and D (three-digit exponents lose their letter).
  const Row rows[] = {{"1.5", 1.5, 3},        {"+2", 2.0, 2},         {".5 m", 0.5, 2},        {"-3.", -3.0, 3},
                      {"1.0E+03", 1000.0, 7}, {"1.0D+03", 1000.0, 7}, {"1.0d3", 1000.0, 5},    {"1.0-103", 1e-103, 7},
                      {"1.0+103", 1e103, 7},  {"1-2", 1.0, 1},        {"1e", 1.0, 1},          {"12,5", 12.0, 2},
                      {"1e400", HUGE_VAL, 5}, {"1e-400", 0.0, 6},     {"-1e400", -HUGE_VAL, 6}};
  for (const Row& row : rows) {
    const auto read = read_number(row.text);
    ASSERT_TRUE(read.ok()) << row.text;
    EXPECT_EQ(read->value, row.value) << row.text;
    EXPECT_EQ(read->length, row.length) << row.text;
  }
}

TEST(Number, MayBeNoneOrInfinite) {
  EXPECT_TRUE(std::isnan(read_number("NaN")->value));
  EXPECT_TRUE(std::isinf(read_number("-Infinity")->value));
  EXPECT_EQ(read_number("Infinity")->length, 8u);
}

TEST(Number, ThatDidNotFitItsFieldIsSaidSo) { EXPECT_TRUE(absl::IsOutOfRange(read_number("*****").status())); }

TEST(Number, IsNotSeenWhereThereIsNone) {
  for (const char* const text : {"", " ", "abc", "-", "+", ".", "e5", "--1"}) {
    EXPECT_TRUE(absl::IsInvalidArgument(read_number(text).status())) << text;
  }
}

TEST(Number, OfRandomBytesIsAnAnswer) {
  std::mt19937 random(3);
  const std::string letters = "0123456789.+-eEdDqQnaif*x ";
  for (int n = 0; n < 100'000; ++n) {
    std::string text;
    for (std::size_t i = random() % 12; i > 0; --i) text += letters[random() % letters.size()];
    const auto read = read_number(text);
    if (read.ok()) {
      EXPECT_LE(read->length, text.size()) << text;
    }
  }
}

}  // namespace
}  // namespace drover::code
