// Sobol' points, scrambled: an even spread over the unit cube from the first point on.
//
// Direction numbers are those of Boost.Random (Joe and Kuo 2008, "Constructing Sobol' sequences with better
// two-dimensional projections", SIAM Journal on Scientific Computing 30, 2635-2654). Scrambling is a nested uniform
// scramble (Owen 1995) by hashing: Laine and Karras (2011), "Stratified sampling for stochastic transparency", EGSR, in
// the form of Burley (2020), "Practical hash-based Owen scrambling", Journal of Computer Graphics Techniques 9(4).
#pragma once

#include <cstddef>
#include <cstdint>
#include <vector>

#include "search/space.h"

namespace drover::search {

// Points are numbered in natural order, not in that of a Gray code: each run of 2^k points from a multiple of 2^k on
// holds the same ones.
class Sobol {
 public:
  // `dimensions` of 1 or more. Beyond Boost's table (3667) the dimensions of the table come round again, each time with
  // a scramble of its own: still uniform, no longer even across such pairs.
  explicit Sobol(std::size_t dimensions);

  // The 32-bit coordinate of point `index` of the plain sequence; point 0 is the origin.
  std::uint32_t bits(std::uint32_t index, std::size_t dimension) const;

  // Point `index` (from 0) of the scrambled sequence, in [0, 1). A function of (seed, index) alone.
  Point point(std::uint64_t seed, std::uint32_t index) const;

 private:
  std::size_t dimensions_;
  std::vector<std::uint32_t> directions_;  // 32 a dimension of the table
};

// A nested uniform scramble of the bits of x from the highest down.
std::uint32_t owen_scramble(std::uint32_t x, std::uint32_t seed);

}  // namespace drover::search
