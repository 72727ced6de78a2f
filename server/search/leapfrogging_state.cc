// A leapfrogging search, saved and loaded.
#include <utility>

#include "search/leapfrogging.h"
#include "search/saved_state.h"
#include "search/state/state.pb.h"
#include "status/try.h"

namespace drover::search {
namespace {

absl::Status damaged() { return absl::DataLossError("the saved state of the search does not fit together"); }

absl::StatusOr<Player> player_from(const state::Player& saved, std::size_t variables, std::int64_t asked) {
  Player player;
  if (saved.rank() > static_cast<std::uint32_t>(Rank::kNowhere)) return damaged();
  player.standing.rank = static_cast<Rank>(saved.rank());
  player.standing.since = saved.since();
  player.out = saved.out();
  if (player.out < 0 || player.out > asked) return damaged();
  if (player.standing.since < 0 || player.standing.since > asked) return damaged();
  DROVER_ASSIGN(const Point value, point_from(saved.value(), 1));
  player.standing.value = value.front();
  if (player.placed()) {
    DROVER_ASSIGN(player.point, point_from(saved.point(), variables));
  }
  if (!player.idle() && !saved.landing().empty()) {
    DROVER_ASSIGN(player.landing, point_from(saved.landing(), variables));
  }
  return player;
}

}  // namespace

std::string Leapfrogging::save() const {
  state::Leapfrogging saved;
  saved.set_asked(memory_.asked);
  saved.set_learned(memory_.learned);
  saved.set_scattered(memory_.scattered);
  saved.set_visited(memory_.visited.save());
  for (const Player& player : memory_.swarm.players()) {
    state::Player& one = *saved.add_players();
    one.set_since(player.standing.since);
    one.set_rank(static_cast<std::uint32_t>(player.standing.rank));
    one.set_value(point_bytes({player.standing.value}));
    one.set_point(point_bytes(player.point));
    one.set_out(player.out);
    one.set_landing(point_bytes(player.landing));
  }
  return wrap_state(space_, given_, saved);
}

// The number of players is that of the state: amended bounds or another `parallel` would start with another.
absl::Status Leapfrogging::load(std::string_view bytes, const History&) {
  state::Leapfrogging saved;
  DROVER_TRY(unwrap_state(bytes, space_, given_, saved));
  if (saved.players_size() == 0 || saved.asked() < 0 || saved.learned() < 0 || saved.scattered() < 0) return damaged();
  DROVER_ASSIGN(Visited visited, Visited::load(space_, saved.visited()));
  Memory memory{.swarm = Swarm(0),
                .asked = saved.asked(),
                .learned = saved.learned(),
                .scattered = saved.scattered(),
                .visited = std::move(visited)};
  for (const state::Player& one : saved.players()) {
    DROVER_ASSIGN(Player player, player_from(one, space_.size(), saved.asked()));
    memory.swarm.players().push_back(std::move(player));
  }
  memory_ = std::move(memory);
  box_.reset();
  return absl::OkStatus();
}

}  // namespace drover::search
