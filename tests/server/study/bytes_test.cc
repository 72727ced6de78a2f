#include "study/bytes.h"

#include <gtest/gtest.h>

#include <bit>
#include <cmath>
#include <cstdint>
#include <limits>

namespace drover::study {
namespace {

TEST(Bytes, BringEveryDoubleBackBitForBit) {
  const std::vector<double> all = {0.0, -0.0, 1.0, 0.1, -1e308, 5e-324, std::numeric_limits<double>::infinity(),
                                   std::numeric_limits<double>::quiet_NaN()};
  const auto back = unpack_doubles(pack_doubles(all));
  ASSERT_TRUE(back.ok());
  for (std::size_t i = 0; i < all.size(); ++i) {
    EXPECT_EQ(std::bit_cast<std::uint64_t>((*back)[i]), std::bit_cast<std::uint64_t>(all[i]));
  }
}

TEST(Bytes, AreLittleEndian) {
  // IEEE 754: 1.0 is 0x3FF0000000000000.
  EXPECT_EQ(pack_double(1.0), std::string("\0\0\0\0\0\0\xf0\x3f", 8));
}

TEST(Bytes, OfAWrongLengthAreRefused) {
  EXPECT_FALSE(unpack_doubles("1234567").ok());
  EXPECT_FALSE(unpack_double("").ok());
  EXPECT_FALSE(unpack_double(std::string(16, '\0')).ok());
}

}  // namespace
}  // namespace drover::study
