#include "store/chain.h"

#include <gtest/gtest.h>

#include "study/events.pb.h"

namespace drover::store {
namespace {

TEST(Chain, IsSha256OfTheHashBeforeAndTheEvent) {
  // SHA-256 of the three bytes "abc" (FIPS 180-4, published example).
  EXPECT_EQ(hex(chain_next("", "abc")), "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
  EXPECT_EQ(chain_next("a", "bc"), chain_next("", "abc"));
  EXPECT_EQ(chain_start(), std::string(32, '\0'));
}

TEST(Chain, SeesTheSameMessageAsTheSameBytesWhateverTheOrderOfItsMap) {
  study::Event forward, backward;
  for (int i = 0; i < 100; ++i) (*forward.mutable_licence_pools_set()->mutable_counts())["p" + std::to_string(i)] = i;
  for (int i = 99; i >= 0; --i) (*backward.mutable_licence_pools_set()->mutable_counts())["p" + std::to_string(i)] = i;
  EXPECT_EQ(canonical(forward), canonical(backward));
}

}  // namespace
}  // namespace drover::store
