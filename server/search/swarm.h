// The players of a leapfrogging search: where each stands, how well, and where it is going.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "search/space.h"
#include "search/standing.h"

namespace drover::search {

struct Player {
  Standing standing;     // kNowhere: it has not landed anywhere yet
  Point point;           // where it stands; empty when nowhere
  std::int64_t out = 0;  // ask that is out for it; 0: it is idle
  Point landing;         // of that ask
  bool idle() const { return out == 0; }
  bool placed() const { return standing.rank != Rank::kNowhere; }
};

class Swarm {
 public:
  explicit Swarm(std::size_t players) : players_(players) {}

  std::vector<Player>& players() { return players_; }
  const std::vector<Player>& players() const { return players_; }

  // The best of those that stand somewhere; null: none does.
  const Player* best() const;
  // Index of the worst idle player that is not closer than `near` to the best in every variable (nor the best itself);
  // none: there is none. Of equal ones the one that has stood the longest, so that on a plateau each has its turn.
  // Those that stand nowhere are the worst of all, the first of them first.
  std::optional<std::size_t> worst_idle(double near) const;
  // Where a point from elsewhere may go: the worst idle one of those that stand somewhere, other than the best; else
  // the first idle one that stands nowhere.
  Player* place_for_foreign();
  Player* of_ask(std::int64_t ask);  // that is out for it; null: none
  bool all_placed() const;
  bool stands_at(const Point& point) const;  // one of them does

  // The box of the share of the players nearest to the best one (by their largest coordinate difference), and its
  // largest side. Meaningless unless all are placed.
  struct Box {
    Point low, high;
    double largest_side = 0.0;
    std::size_t widest = 0;  // variable
  };
  Box box(double share) const;

 private:
  std::vector<Player> players_;
};

}  // namespace drover::search
