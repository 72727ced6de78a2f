#include "link/identity.h"

#include <gtest/gtest.h>

#include <set>
#include <string>

namespace drover::link {
namespace {

TEST(RandomId, Has32LowerCaseDigitsAndNeverComesTwice) {
  std::set<std::string> seen;
  for (int i = 0; i < 1000; ++i) {
    const std::string id = random_id();
    ASSERT_EQ(id.size(), 32u);
    ASSERT_EQ(id.find_first_not_of("0123456789abcdef"), std::string::npos) << id;
    ASSERT_TRUE(seen.insert(id).second) << id;
  }
}

TEST(RandomNumber, UsesAllItsBits) {
  std::uint64_t any = 0, all = ~0ull;
  for (int i = 0; i < 200; ++i) {
    const std::uint64_t number = random_number();
    any |= number;
    all &= number;
  }
  // A bit that stayed equal over 200 fair draws has a chance of 2^-199.
  EXPECT_EQ(any, ~0ull);
  EXPECT_EQ(all, 0ull);
}

}  // namespace
}  // namespace drover::link
