#include "search/scatter.h"

namespace drover::search {

Point Scatter::at(std::int64_t index) const {
  if (!space_.baseline().empty()) {
    if (index == 0) return space_.baseline();
    --index;
  }
  return space_.snap(sobol_.point(seed_, static_cast<std::uint32_t>(index)));
}

std::optional<Point> Scatter::next(const Visited& visited, std::int64_t& used) const {
  return visited.fresh([&](int) { return at(used++); });
}

}  // namespace drover::search
