// Which points of a discrete space were asked for, so that none is asked twice. A space with a real variable has no
// need of it: every point is new, and nothing is kept.
#pragma once

#include <cstddef>
#include <cstdint>
#include <functional>
#include <optional>
#include <set>
#include <string>
#include <string_view>
#include <vector>

#include "absl/status/statusor.h"
#include "search/space.h"

namespace drover::search {

class Visited {
 public:
  explicit Visited(const Space& space) : space_(space) {}

  void add(const Point& point);
  bool contains(const Point& point) const;
  bool full() const;  // every point was asked for

  // `draw(0)` if it is new; else its next tries, `draw(1)` and so on; else the nearest new point to the last of them,
  // in single steps. None when all points were asked for; nothing is drawn then.
  std::optional<Point> fresh(const std::function<Point(int)>& draw) const;

  // The points that the amended space still has.
  Visited in(const Space& amended) const;

  // A few bytes a point; equal sets, equal bytes.
  std::string save() const;
  static absl::StatusOr<Visited> load(const Space& space, std::string_view bytes);  // DATA_LOSS

 private:
  using Levels = std::vector<std::int64_t>;
  Levels levels_of(const Point& point) const;
  Point point_of(const Levels& levels) const;
  std::vector<Levels> next_to(const Levels& levels) const;
  Point nearest_new(const Point& point) const;
  Levels counted_up(Levels levels) const;

  Space space_;
  std::set<Levels> asked_;
};

}  // namespace drover::search
