#include "search/random.h"

#include <gtest/gtest.h>

#include <vector>

namespace drover::search {
namespace {

// Salmon, Moraes, Dror and Shaw (2011): the known-answer vectors published with the reference implementation, for
// Philox4x32 with 10 rounds (counter and key: zeros, ones, digits of pi).
static_assert(philox({0, 0, 0, 0}, {0, 0}) == Words{0x6627e8d5, 0xe169c58d, 0xbc57ac4c, 0x9b00dbd8});
static_assert(philox({0xffffffff, 0xffffffff, 0xffffffff, 0xffffffff}, {0xffffffff, 0xffffffff}) ==
              Words{0x408f276d, 0x41c83b0e, 0xa20bc7c6, 0x6d5451fd});
static_assert(philox({0x243f6a88, 0x85a308d3, 0x13198a2e, 0x03707344}, {0xa4093822, 0x299f31d0}) ==
              Words{0xd16cfe09, 0x94fdcceb, 0x5001e420, 0x24126ea1});

TEST(Draw, IsAFunctionOfEachOfItsArguments) {
  const double one = draw(7, 1, Purpose::kLeap, 0);
  EXPECT_EQ(one, draw(7, 1, Purpose::kLeap, 0));
  EXPECT_NE(one, draw(8, 1, Purpose::kLeap, 0));
  EXPECT_NE(one, draw(7 + (std::uint64_t{1} << 32), 1, Purpose::kLeap, 0));
  EXPECT_NE(one, draw(7, 2, Purpose::kLeap, 0));
  EXPECT_NE(one, draw(7, 1 + (std::int64_t{1} << 32), Purpose::kLeap, 0));
  EXPECT_NE(one, draw(7, 1, Purpose::kCategory, 0));
  EXPECT_NE(one, draw(7, 1, Purpose::kLeap, 1));
}

TEST(Draw, HasFiftyThreeBitsAndStaysBelowOne) {
  std::uint64_t seen = 0;
  for (std::uint32_t i = 0; i < 1000; ++i) {
    const double drawn = draw(1, 1, Purpose::kLeap, i);
    ASSERT_GE(drawn, 0.0);
    ASSERT_LT(drawn, 1.0);
    seen |= static_cast<std::uint64_t>(drawn * 0x1.0p53);
    ASSERT_EQ(drawn * 0x1.0p53, static_cast<double>(static_cast<std::uint64_t>(drawn * 0x1.0p53)));
  }
  EXPECT_EQ(seen, (std::uint64_t{1} << 53) - 1);  // each of the bits is set in one of a thousand draws
}

TEST(Draw, IsUniform) {
  // 100 cells, 1000 draws expected in each: chi-square of 99 degrees of freedom, mean 99, standard deviation 14.1; the
  // draws are fixed, so that six deviations can only be a mistake.
  std::vector<int> cells(100);
  for (std::int64_t number = 1; number <= 100'000; ++number) {
    ++cells[static_cast<std::size_t>(draw(42, number, Purpose::kLeap, 3) * 100.0)];
  }
  double chi = 0.0;
  for (const int count : cells) chi += (count - 1000.0) * (count - 1000.0) / 1000.0;
  EXPECT_GT(chi, 40.0);
  EXPECT_LT(chi, 185.0);
}

}  // namespace
}  // namespace drover::search
