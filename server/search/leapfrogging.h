// Leapfrogging: the worst player leaps over the best.
//
// Rhinehart, Su and Manimegalai-Sridhar (2012), "Leapfrogging and synoptic leapfrogging: a new optimization approach",
// Computers & Chemical Engineering 40, 67-81. A swarm of players starts evenly spread. Again and again the worst one
// leaps over the best into the box that mirrors its own corner: x = best - r (worst - best), r uniform in [0, 1) for
// each variable. Where it lands it stays, better or worse; so the swarm closes in on the best.
//
// Here:
// - Worst and best are by the feasibility rules (search/standing.h). Of equally good players the oldest is the best,
//   and the one that has stood the longest leaps first.
// - The mirrored box is clipped to the bounds before the draw, so that no pile forms on an edge. Where the best stands
//   on the bound itself there is no room behind it, and the draw is made before it, between the two.
// - Asynchronous: any number of players may be out. Each ask sends the worst idle one over the best of that moment, as
//   soon as every player has been sent to its first place. The best never leaps.
// - An infeasible or failed landing makes the player one of the worst, so that it leaps again from where it landed.
//   While no player stands on anything but a failure there is nothing to leap over, and players are scattered further.
// - A player nearer to the best than half the tolerance has arrived and leaps no more, however bad it is there: around
// a
//   lone good point (a cliff, a lucky value) the worst would leap ever closer, and the others never move.
// - A landing that was withdrawn, stopped early or ran into its time limit says nothing of the place: the player is
//   idle again where it stood before.
// - Stepped and integer variables land on the level that the draw falls into. A choice has no other side: the player
//   takes the best's with one half, else one of the others; standing on the best's it stays on it.
// - A point from elsewhere takes the place of the worst player, if it is better; before the start, of at most two.
// - Converged when the box of `share` of the players (those nearest to the best) has no side of `tolerance` or more.
// - In a space of discrete variables alone no point is asked for twice: the leap is drawn again, then the nearest new
//   point is taken. Players cannot meet there, so it has converged when 10 times as many asks as there are players
//   found nothing better than the best, or when every point was asked for.
// - Amended bounds: players outside them lose their place and start again.
//
// Defaults: ten players a variable, at least twice `parallel` (so that half the swarm stands still while the other is
// out) and four; a space of fewer points has one a point. Tolerance 0.001 of the range, share 1: common practice.
// State: O(population x variables); of discrete variables alone also a few bytes a point asked for. learn() costs
// O(population), an ask O(population + variables).
#pragma once

#include <memory>

#include "search/method.h"
#include "search/scatter.h"
#include "search/swarm.h"
#include "search/visited.h"

namespace drover::search {

class Leapfrogging final : public SearchMethod {
 public:
  Leapfrogging(const Space& space, const Settings& settings);

  std::vector<Ask> next(int count, const History& history) override;
  absl::Status learn(const Outcome& outcome) override;
  absl::Status amend(const Space& space) override;
  Progress progress() const override;
  std::string save() const override;
  absl::Status load(std::string_view bytes, const History& history) override;
  int revision() const override { return 1; }

  int population() const { return static_cast<int>(memory_.swarm.players().size()); }

 private:
  // What a method remembers; everything else follows from space and settings.
  struct Memory {
    Swarm swarm{0};
    std::int64_t asked = 0, learned = 0, scattered = 0;
    Visited visited;
  };
  bool converged() const;
  bool stale() const;                              // a discrete swarm that finds nothing better any more
  std::optional<std::size_t> next_player() const;  // none: all are out, or as near to the best as they are to come
  std::optional<Ask> ask();
  std::optional<Point> landing(const Player& player);
  Point leap(const Player& player, const Player& best, std::int64_t number, int attempt) const;
  double leap_over(std::size_t i, double from, double best, std::int64_t number, int attempt) const;
  double other_choice(std::size_t i, double from, double best, std::int64_t number, int attempt) const;
  void take_foreign(const Outcome& outcome);
  const Swarm::Box& box() const;
  std::string sentence() const;

  Space space_;
  Settings given_;
  Settings settings_;  // with the defaults filled in
  Scatter scatter_;
  Memory memory_;
  mutable std::optional<Swarm::Box> box_;  // of the swarm as it stands; none: has to be worked out
};

}  // namespace drover::search
