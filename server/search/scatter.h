// An even spread of first points: today's design first, then scrambled Sobol' points on the space.
#pragma once

#include <cstdint>
#include <optional>

#include "search/method.h"
#include "search/sobol.h"
#include "search/space.h"
#include "search/visited.h"

namespace drover::search {

class Scatter {
 public:
  Scatter(const Space& space, std::uint64_t seed) : space_(space), seed_(seed), sobol_(space.size()) {}

  // The next point, moving `used` on past it. In a discrete space points that were visited are passed over; none when
  // all were.
  std::optional<Point> next(const Visited& visited, std::int64_t& used) const;

 private:
  Point at(std::int64_t index) const;  // from 0

  Space space_;
  std::uint64_t seed_;
  Sobol sobol_;
};

}  // namespace drover::search
