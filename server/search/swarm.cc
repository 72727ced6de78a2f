#include "search/swarm.h"

#include <algorithm>
#include <cmath>
#include <tuple>
#include <utility>

namespace drover::search {
namespace {

bool leaps_before(const Player& a, const Player& b) {
  const auto merit = [](const Player& player) { return std::tie(player.standing.rank, player.standing.value); };
  return merit(a) != merit(b) ? merit(b) < merit(a) : a.standing.since < b.standing.since;
}

// The largest difference in any variable.
double distance(const Player& a, const Player& b) {
  double largest = 0.0;
  for (std::size_t i = 0; i < a.point.size(); ++i) largest = std::max(largest, std::abs(a.point[i] - b.point[i]));
  return largest;
}

}  // namespace

const Player* Swarm::best() const {
  const Player* best = nullptr;
  for (const Player& player : players_) {
    if (player.placed() && (best == nullptr || player.standing.better_than(best->standing))) best = &player;
  }
  return best;
}

std::optional<std::size_t> Swarm::worst_idle(double near) const {
  const Player* const best = this->best();
  std::optional<std::size_t> worst;
  for (std::size_t i = 0; i < players_.size(); ++i) {
    const Player& player = players_[i];
    if (!player.idle() || &player == best) continue;
    if (worst && !leaps_before(player, players_[*worst])) continue;
    const bool arrived = player.placed() && best != nullptr && distance(player, *best) < near;
    if (!arrived) worst = i;
  }
  return worst;
}

Player* Swarm::place_for_foreign() {
  const Player* const best = this->best();
  Player *place = nullptr, *empty = nullptr;
  for (Player& player : players_) {
    if (!player.idle() || &player == best) continue;
    if (!player.placed()) {
      if (empty == nullptr) empty = &player;
    } else if (place == nullptr || leaps_before(player, *place)) {
      place = &player;
    }
  }
  return place != nullptr ? place : empty;
}

Player* Swarm::of_ask(std::int64_t ask) {
  const auto at =
      std::find_if(players_.begin(), players_.end(), [&](const Player& player) { return player.out == ask; });
  return at == players_.end() ? nullptr : &*at;
}

bool Swarm::all_placed() const {
  return std::all_of(players_.begin(), players_.end(), [](const Player& player) { return player.placed(); });
}

bool Swarm::stands_at(const Point& point) const {
  return std::any_of(players_.begin(), players_.end(), [&](const Player& player) { return player.point == point; });
}

Swarm::Box Swarm::box(double share) const {
  const Player* const centre = best();
  Box box;
  if (centre == nullptr) return box;
  std::vector<std::pair<double, std::size_t>> order;  // distance, index
  for (std::size_t i = 0; i < players_.size(); ++i) {
    if (!players_[i].placed()) continue;
    order.emplace_back(distance(players_[i], *centre), i);
  }
  std::sort(order.begin(), order.end());
  const auto wanted = static_cast<std::size_t>(std::ceil(share * static_cast<double>(players_.size()) - 1e-9));
  order.resize(std::min(order.size(), std::max<std::size_t>(1, wanted)));
  box.low = box.high = centre->point;
  for (const auto& [apart, i] : order) {
    for (std::size_t j = 0; j < box.low.size(); ++j) {
      box.low[j] = std::min(box.low[j], players_[i].point[j]);
      box.high[j] = std::max(box.high[j], players_[i].point[j]);
    }
  }
  for (std::size_t j = 0; j < box.low.size(); ++j) {
    if (box.high[j] - box.low[j] <= box.largest_side) continue;
    box.largest_side = box.high[j] - box.low[j];
    box.widest = j;
  }
  return box;
}

}  // namespace drover::search
