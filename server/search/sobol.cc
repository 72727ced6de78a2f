#include "search/sobol.h"

#include <algorithm>
#include <boost/random/sobol.hpp>

#include "search/random.h"

namespace drover::search {
namespace {

constexpr std::size_t kTable = boost::random::default_sobol_table::max_dimension;
constexpr std::size_t kBits = 32;

std::uint32_t reversed(std::uint32_t x) {
  x = ((x >> 1) & 0x55555555u) | ((x & 0x55555555u) << 1);
  x = ((x >> 2) & 0x33333333u) | ((x & 0x33333333u) << 2);
  x = ((x >> 4) & 0x0F0F0F0Fu) | ((x & 0x0F0F0F0Fu) << 4);
  x = ((x >> 8) & 0x00FF00FFu) | ((x & 0x00FF00FFu) << 8);
  return (x >> 16) | (x << 16);
}

// Each bit depends on itself and the lower ones only (the permutation of Burley 2020, section 4).
std::uint32_t laine_karras(std::uint32_t x, std::uint32_t seed) {
  x += seed;
  x ^= x * 0x6c50b47cu;
  x ^= x * 0xb82f1e52u;
  x ^= x * 0xc7afe638u;
  x ^= x * 0x8d22f6e6u;
  return x;
}

}  // namespace

std::uint32_t owen_scramble(std::uint32_t x, std::uint32_t seed) { return reversed(laine_karras(reversed(x), seed)); }

// In Gray-code order point 2^k of the sequence is v(k) xor v(k + 1), where v(j) is direction number j, and point 1 is
// v(1): so Boost's generator, asked for these points alone, gives its direction numbers.
Sobol::Sobol(std::size_t dimensions) : dimensions_(dimensions) {
  const std::size_t kept = std::min(dimensions, kTable);
  directions_.resize(kept * kBits);
  boost::random::sobol_engine<std::uint32_t, kBits> engine(kept);
  for (std::size_t bit = 0; bit < kBits; ++bit) {
    engine.seed((std::uint32_t{1} << bit) - 1);
    for (std::size_t d = 0; d < kept; ++d) {
      const std::uint32_t before = bit == 0 ? 0 : directions_[d * kBits + bit - 1];
      directions_[d * kBits + bit] = static_cast<std::uint32_t>(engine()) ^ before;
    }
  }
}

std::uint32_t Sobol::bits(std::uint32_t index, std::size_t dimension) const {
  std::uint32_t x = 0;
  for (std::size_t bit = 0; index != 0; ++bit, index >>= 1) {
    if ((index & 1u) != 0) x ^= directions_[(dimension % kTable) * kBits + bit];
  }
  return x;
}

Point Sobol::point(std::uint64_t seed, std::uint32_t index) const {
  Point made(dimensions_);
  for (std::size_t d = 0; d < dimensions_; ++d) {
    const auto hash =
        static_cast<std::uint32_t>(draw_bits(seed, static_cast<std::int64_t>(d) + 1, Purpose::kScramble, 0));
    made[d] = static_cast<double>(owen_scramble(bits(index, d), hash)) * 0x1.0p-32;
  }
  return made;
}

}  // namespace drover::search
