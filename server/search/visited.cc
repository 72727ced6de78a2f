#include "search/visited.h"

#include <algorithm>
#include <deque>
#include <utility>

#include "absl/status/status.h"
#include "search/amended.h"

namespace drover::search {
namespace {

constexpr int kTries = 32;
constexpr int kPlacesLookedAround = 1000;

// Seven bits a byte, the lowest first; the top bit says that more follow.
void add_number(std::string& bytes, std::uint64_t number) {
  for (; number >= 0x80; number >>= 7) bytes.push_back(static_cast<char>(0x80 | (number & 0x7f)));
  bytes.push_back(static_cast<char>(number));
}

// Takes one number off the front; none: it is cut, or longer than 63 bits.
std::optional<std::int64_t> take_number(std::string_view& bytes) {
  std::uint64_t number = 0;
  for (int shift = 0; shift < 63 && !bytes.empty(); shift += 7) {
    const auto byte = static_cast<unsigned char>(bytes.front());
    bytes.remove_prefix(1);
    number |= static_cast<std::uint64_t>(byte & 0x7f) << shift;
    if (byte < 0x80) return static_cast<std::int64_t>(number);
  }
  return std::nullopt;
}

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

bool Visited::full() const { return space_.discrete() && static_cast<std::int64_t>(asked_.size()) >= space_.count(); }

std::optional<Point> Visited::fresh(const std::function<Point(int)>& draw) const {
  if (full()) return std::nullopt;
  Point point = draw(0);
  for (int attempt = 1; attempt < kTries && contains(point); ++attempt) point = draw(attempt);
  return contains(point) ? nearest_new(point) : point;
}

// One step away in one variable; of a choice every other one is.
std::vector<Visited::Levels> Visited::next_to(const Levels& levels) const {
  std::vector<Levels> near;
  for (std::size_t i = 0; i < levels.size(); ++i) {
    const bool choice = space_.variable(i).kind == Kind::kChoice;
    const std::int64_t first = choice ? 0 : std::max<std::int64_t>(levels[i] - 1, 0);
    const std::int64_t last = choice ? space_.levels(i) - 1 : std::min(levels[i] + 1, space_.levels(i) - 1);
    for (std::int64_t level = first; level <= last; ++level) {
      if (level == levels[i]) continue;
      near.push_back(levels);
      near.back()[i] = level;
    }
  }
  return near;
}

// Breadth first around the point; where all of that was asked for, further on by counting.
Point Visited::nearest_new(const Point& point) const {
  std::deque<Levels> around{levels_of(point)};
  std::set<Levels> seen{around.front()};
  for (int places = 0; places < kPlacesLookedAround && !around.empty(); ++places) {
    for (Levels& near : next_to(around.front())) {
      if (!seen.insert(near).second) continue;
      if (!asked_.contains(near)) return point_of(near);
      around.push_back(std::move(near));
    }
    around.pop_front();
  }
  return point_of(counted_up(levels_of(point)));
}

// The next new point of the space counted up with the first variable fastest and round at its end: there is one after
// at most as many steps as points were asked for.
Visited::Levels Visited::counted_up(Levels levels) const {
  while (asked_.contains(levels)) {
    for (std::size_t i = 0; i < levels.size(); ++i) {
      levels[i] = (levels[i] + 1) % space_.levels(i);
      if (levels[i] != 0) break;
    }
  }
  return levels;
}

Visited Visited::in(const Space& amended) const {
  Visited kept(amended);
  for (const Levels& levels : asked_) {
    if (const std::optional<Point> point = point_in(amended, space_, point_of(levels))) kept.add(*point);
  }
  return kept;
}

std::string Visited::save() const {
  std::string bytes;
  for (const Levels& levels : asked_) {
    for (const std::int64_t level : levels) add_number(bytes, static_cast<std::uint64_t>(level));
  }
  return bytes;
}

absl::StatusOr<Visited> Visited::load(const Space& space, std::string_view bytes) {
  const absl::Status damaged = absl::DataLossError("the saved state of the search has points that the space has not");
  Visited visited(space);
  if (!space.discrete() && !bytes.empty()) return damaged;
  while (!bytes.empty()) {
    Levels levels(space.size());
    for (std::size_t i = 0; i < levels.size(); ++i) {
      const std::optional<std::int64_t> level = take_number(bytes);
      if (!level || *level >= space.levels(i)) return damaged;
      levels[i] = *level;
    }
    visited.asked_.insert(visited.asked_.end(), std::move(levels));
  }
  return visited;
}

}  // namespace drover::search
