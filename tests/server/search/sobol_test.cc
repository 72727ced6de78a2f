#include "search/sobol.h"

#include <gtest/gtest.h>

#include <set>
#include <utility>
#include <vector>

namespace drover::search {
namespace {

// The first points of dimensions 1 to 8 with the direction numbers of Joe and Kuo (2008), new-joe-kuo-6.21201. They are
// published in the order of the Gray code: the n-th of them is the one whose natural number is the Gray code of n.
TEST(Sobol, HasThePublishedPoints) {
  const std::vector<std::vector<double>> published = {
      {0, 0, 0, 0, 0, 0, 0, 0},
      {0.5, 0.5, 0.5, 0.5, 0.5, 0.5, 0.5, 0.5},
      {0.75, 0.25, 0.25, 0.25, 0.75, 0.75, 0.25, 0.75},
      {0.25, 0.75, 0.75, 0.75, 0.25, 0.25, 0.75, 0.25},
      {0.375, 0.375, 0.625, 0.875, 0.375, 0.125, 0.375, 0.875},
      {0.875, 0.875, 0.125, 0.375, 0.875, 0.625, 0.875, 0.375},
      {0.625, 0.125, 0.875, 0.625, 0.625, 0.875, 0.125, 0.125},
      {0.125, 0.625, 0.375, 0.125, 0.125, 0.375, 0.625, 0.625},
      {0.1875, 0.3125, 0.9375, 0.4375, 0.5625, 0.3125, 0.4375, 0.9375},
  };
  const Sobol sobol(8);
  for (std::uint32_t n = 0; n < published.size(); ++n) {
    for (std::size_t d = 0; d < 8; ++d) {
      EXPECT_EQ(sobol.bits(n ^ (n >> 1), d) * 0x1.0p-32, published[n][d]) << "point " << n << ", dimension " << d + 1;
    }
  }
}

// Direction numbers m_1..m_s of dimension 21 in the same file: v_i = m_i 2^(32-i).
TEST(Sobol, HasThePublishedDirectionNumbersOfALaterDimension) {
  const std::vector<std::uint32_t> m = {1, 3, 7, 13, 13, 15, 69};
  const Sobol sobol(21);
  for (std::uint32_t i = 0; i < m.size(); ++i) EXPECT_EQ(sobol.bits(1u << i, 20), m[i] << (31 - i));
}

// Owen (1995): a nested uniform scramble of a (t, m, s)-net is one with the same t. Dimensions 1 and 2 are a (0, m,
// 2)-net: each elementary interval of area 2^-m, whatever its shape, holds exactly one of 2^m points from a multiple of
// 2^m on.
TEST(ScrambledSobol, KeepsOnePointInEachElementaryInterval) {
  const Sobol sobol(2);
  for (const std::uint64_t seed : {0ull, 1ull, 0xdeadbeefcafeull}) {
    for (const std::uint32_t first : {0u, 256u, 5u * 256u}) {
      for (int across = 0; across <= 8; ++across) {
        std::set<std::pair<int, int>> taken;
        for (std::uint32_t i = 0; i < 256; ++i) {
          const Point point = sobol.point(seed, first + i);
          taken.emplace(static_cast<int>(point[0] * (1 << across)), static_cast<int>(point[1] * (256 >> across)));
        }
        EXPECT_EQ(taken.size(), 256u) << "seed " << seed << ", from " << first << ", 2^" << across << " columns";
      }
    }
  }
}

TEST(ScrambledSobol, PutsOnePointInEachStripOfEachDimension) {
  const Sobol sobol(40);
  for (const std::uint64_t seed : {3ull, 4ull}) {
    for (std::size_t d = 0; d < 40; ++d) {
      std::set<int> strips;
      for (std::uint32_t i = 0; i < 128; ++i) strips.insert(static_cast<int>(sobol.point(seed, i)[d] * 128));
      EXPECT_EQ(strips.size(), 128u) << "dimension " << d + 1;
    }
  }
}

TEST(ScrambledSobol, IsAFunctionOfSeedAndIndex) {
  const Sobol sobol(3);
  const Point later = sobol.point(9, 1000);
  EXPECT_EQ(later, Sobol(3).point(9, 1000));
  EXPECT_NE(later, sobol.point(10, 1000));
  EXPECT_NE(later, sobol.point(9, 1001));
  EXPECT_EQ(later[0], Sobol(1).point(9, 1000)[0]) << "a further dimension moves no other";
}

// The first point is anywhere: over 4096 seeds each of 16 cells of the first coordinate expects 256, standard deviation
// 15.5; five of them either way.
TEST(ScrambledSobol, IsUniformOverSeeds) {
  const Sobol sobol(1);
  std::vector<int> cells(16);
  for (std::uint64_t seed = 0; seed < 4096; ++seed) ++cells[static_cast<std::size_t>(sobol.point(seed, 0)[0] * 16)];
  for (const int count : cells) EXPECT_NEAR(count, 256, 78);
}

TEST(ScrambledSobol, GoesOnBeyondTheTableOfDirectionNumbers) {
  const Sobol sobol(4000);
  const Point point = sobol.point(1, 77);
  ASSERT_EQ(point.size(), 4000u);
  EXPECT_NE(point[0], point[3667]) << "the same direction numbers, another scramble";
  for (const double x : point) EXPECT_TRUE(x >= 0.0 && x < 1.0);
}

// Nested: two numbers that share their highest k bits and differ in the next do so afterwards.
TEST(OwenScramble, KeepsWhereTwoNumbersPart) {
  for (std::uint32_t seed = 1; seed < 100; ++seed) {
    for (int bit = 0; bit < 32; ++bit) {
      const std::uint32_t a = 0x9e3779b9u * seed,
                          b = a ^ (0x80000000u >> bit) ^ (bit < 31 ? 0x55555555u >> (bit + 1) : 0);
      const std::uint32_t parted = owen_scramble(a, seed) ^ owen_scramble(b, seed);
      EXPECT_EQ(__builtin_clz(parted), bit);
    }
  }
}

}  // namespace
}  // namespace drover::search
