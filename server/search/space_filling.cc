#include "search/space_filling.h"

#include <utility>

#include "absl/strings/str_cat.h"
#include "search/amended.h"
#include "search/saved_state.h"
#include "search/state/state.pb.h"
#include "status/try.h"

namespace drover::search {

SpaceFilling::SpaceFilling(const Space& space, const Settings& settings)
    : space_(space), settings_(settings), scatter_(space, settings.seed), memory_{.visited = Visited(space)} {}

std::vector<Ask> SpaceFilling::next(int count, const History&) {
  std::vector<Ask> asks;
  while (static_cast<int>(asks.size()) < count) {
    std::optional<Point> point = scatter_.next(memory_.visited, memory_.scattered);
    if (!point) break;
    memory_.visited.add(*point);
    memory_.out[++memory_.asked] = *point;
    asks.push_back({.number = memory_.asked, .point = *std::move(point), .cells = {}, .purpose = "spread"});
  }
  return asks;
}

absl::Status SpaceFilling::learn(const Outcome& outcome) {
  if (const absl::Status sound = check_outcome(outcome, space_.size()); !sound.ok()) return sound;
  if (outcome.ask > memory_.asked) return absl::NotFoundError(absl::StrCat("ask ", outcome.ask, " was never made"));
  Point point = space_.snap(outcome.point);
  if (outcome.ask == 0) {
    memory_.visited.add(point);
  } else {
    const auto out = memory_.out.find(outcome.ask);
    if (out == memory_.out.end()) {
      return absl::AlreadyExistsError(absl::StrCat("the outcome of ask ", outcome.ask, " was learned before"));
    }
    point = std::move(out->second);
    memory_.out.erase(out);
  }
  ++memory_.learned;
  if (outcome.verdict != Verdict::kEvaluated || point.empty()) return absl::OkStatus();
  Standing standing = standing_of(outcome);
  if (outcome.ask == 0) standing.since = memory_.asked;
  if (!standing.better_than(memory_.best)) return absl::OkStatus();
  memory_.best = standing;
  memory_.best_point = std::move(point);
  return absl::OkStatus();
}

absl::Status SpaceFilling::amend(const Space& space) {
  if (const absl::Status sound = check_amendment(space_, space); !sound.ok()) return sound;
  const auto moved = [&](const Point& point) {
    return point.empty() ? Point() : point_in(space, space_, point).value_or(Point());
  };
  for (auto& [ask, point] : memory_.out) point = moved(point);
  memory_.best_point = moved(memory_.best_point);
  if (memory_.best_point.empty()) memory_.best = {};
  memory_.visited = memory_.visited.in(space);
  space_ = space;
  scatter_ = Scatter(space, settings_.seed);
  return absl::OkStatus();
}

Progress SpaceFilling::progress() const {
  Progress progress{.asked = memory_.asked, .learned = memory_.learned};
  progress.converged = memory_.visited.full();
  if (memory_.best.rank == Rank::kFeasible) {
    progress.best = memory_.best.value;
    progress.best_point = memory_.best_point;
  }
  progress.sentence = sentence();
  return progress;
}

std::string SpaceFilling::sentence() const {
  const std::string found = memory_.best.rank == Rank::kFeasible ? "" : "; no feasible design so far";
  if (memory_.visited.full()) return absl::StrCat("all ", space_.count(), " designs have been tried", found);
  const std::int64_t landed = memory_.asked - static_cast<std::int64_t>(memory_.out.size());
  return absl::StrCat("spreading out: ", landed, " of ", memory_.asked, " points are in", found);
}

std::string SpaceFilling::save() const {
  state::SpaceFilling saved;
  saved.set_asked(memory_.asked);
  saved.set_learned(memory_.learned);
  saved.set_scattered(memory_.scattered);
  saved.set_visited(memory_.visited.save());
  saved.set_best_rank(static_cast<std::uint32_t>(memory_.best.rank));
  saved.set_best_ask(memory_.best.since);
  saved.set_best(point_bytes({memory_.best.value}));
  saved.set_best_point(point_bytes(memory_.best_point));
  for (const auto& [ask, point] : memory_.out) {
    state::Out& one = *saved.add_out();
    one.set_ask(ask);
    one.set_point(point_bytes(point));
  }
  return wrap_state(space_, settings_, saved);
}

absl::Status SpaceFilling::load(std::string_view bytes, const History&) {
  state::SpaceFilling saved;
  DROVER_TRY(unwrap_state(bytes, space_, settings_, saved));
  const bool sound = saved.asked() >= 0 && saved.learned() >= 0 && saved.scattered() >= 0 &&
                     saved.best_rank() <= static_cast<std::uint32_t>(Rank::kNowhere);
  if (!sound) return absl::DataLossError("the saved state of the search does not fit together");
  DROVER_ASSIGN(Visited visited, Visited::load(space_, saved.visited()));
  Memory memory{.asked = saved.asked(),
                .learned = saved.learned(),
                .scattered = saved.scattered(),
                .visited = std::move(visited)};
  DROVER_ASSIGN(const Point best, point_from(saved.best(), 1));
  memory.best = {static_cast<Rank>(saved.best_rank()), best.front(), saved.best_ask()};
  if (memory.best.rank != Rank::kNowhere) {
    DROVER_ASSIGN(memory.best_point, point_from(saved.best_point(), space_.size()));
  }
  for (const state::Out& one : saved.out()) {
    DROVER_ASSIGN(Point point, point_from(one.point(), one.point().empty() ? 0 : space_.size()));
    memory.out[one.ask()] = std::move(point);
  }
  memory_ = std::move(memory);
  return absl::OkStatus();
}

}  // namespace drover::search
