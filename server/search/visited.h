// Which points of a discrete space were asked for, so that none is asked twice. A space with a real variable has no
// need of it: every point is new.
#pragma once

#include <cstdint>
#include <functional>
#include <optional>
#include <set>
#include <vector>

#include "absl/status/status.h"
#include "search/method.h"
#include "search/space.h"

namespace drover::search {

class Visited {
 public:
  explicit Visited(const Space& space) : space_(space) {}

  void add(const Point& point);
  bool contains(const Point& point) const;
  bool full() const;  // every point was asked for

  // `draw(try)` if it is new; else its next tries; else the first new point beside the last of them, in an order that
  // depends on that point alone. None when all points were asked for.
  std::optional<Point> fresh(const std::function<Point(int)>& draw) const;

  // All points of a history.
  absl::Status add_all(const History& history);

 private:
  using Levels = std::vector<std::int64_t>;
  Levels levels_of(const Point& point) const;
  Point point_of(const Levels& levels) const;
  std::optional<Point> nearest_new(const Point& point) const;

  Space space_;
  std::set<Levels> asked_;
};

}  // namespace drover::search
