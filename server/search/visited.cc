#include "search/visited.h"

#include "status/try.h"

namespace drover::search {
namespace {

constexpr int kTries = 32;

}  // namespace

Visited::Levels Visited::levels_of(const Point& point) const {
  Levels levels(point.size());
  for (std::size_t i = 0; i < point.size(); ++i) levels[i] = space_.level(i, point[i]);
  return levels;
}

Point Visited::point_of(const Levels& levels) const {
  Point point(levels.size());
  for (std::size_t i = 0; i < levels.size(); ++i) point[i] = space_.at_level(i, levels[i]);
  return point;
}

void Visited::add(const Point& point) {
  if (space_.discrete()) asked_.insert(levels_of(point));
}

bool Visited::contains(const Point& point) const { return space_.discrete() && asked_.contains(levels_of(point)); }

bool Visited::full() const {
  return space_.discrete() && static_cast<std::int64_t>(asked_.size()) >= space_.count();
}

std::optional<Point> Visited::fresh(const std::function<Point(int)>& draw) const {
  if (full()) return std::nullopt;
  Point point = draw(0);
  for (int attempt = 1; attempt < kTries && contains(point); ++attempt) point = draw(attempt);
  return contains(point) ? nearest_new(point) : point;
}

// Counts the space up from the point, the first variable fastest: the new points next to it come first, and after at
// most as many steps as there are visited points a new one is found.
std::optional<Point> Visited::nearest_new(const Point& point) const {
  Levels levels = levels_of(point);
  for (std::size_t step = 0; step <= asked_.size(); ++step) {
    for (std::size_t i = 0; i < levels.size(); ++i) {
      levels[i] = (levels[i] + 1) % space_.levels(i);
      if (levels[i] != 0) break;
    }
    if (!asked_.contains(levels)) return point_of(levels);
  }
  return std::nullopt;
}

absl::Status Visited::add_all(const History& history) {
  if (!space_.discrete()) return absl::OkStatus();
  for (std::int64_t position = 1; position <= history.size(); ++position) {
    DROVER_ASSIGN(const Outcome outcome, history.outcome(position));
    if (outcome.point.size() == space_.size()) add(outcome.point);
  }
  return absl::OkStatus();
}

}  // namespace drover::search
