#include "search/leapfrogging.h"

#include <algorithm>
#include <iterator>
#include <utility>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_format.h"
#include "search/amended.h"
#include "search/random.h"

namespace drover::search {
namespace {

constexpr int kPlayersPerVariable = 10;
constexpr int kLeastPlayers = 4;
constexpr int kPatience = 10;  // of a discrete swarm, in populations
constexpr double kTolerance = 1e-3;
constexpr double kShare = 1.0;

Settings with_defaults(const Space& space, Settings settings) {
  if (settings.population == 0) settings.population = kPlayersPerVariable * static_cast<int>(space.size());
  settings.population = std::max({settings.population, 2 * settings.parallel, kLeastPlayers});
  if (space.discrete() && space.count() < settings.population) settings.population = static_cast<int>(space.count());
  if (settings.tolerance == 0.0) settings.tolerance = kTolerance;
  if (settings.share == 0.0) settings.share = kShare;
  return settings;
}

// Draws of one ask: a block of indices for each try, one a variable.
std::uint32_t draw_index(const Space& space, int attempt, std::size_t variable) {
  return static_cast<std::uint32_t>(static_cast<std::size_t>(attempt) * space.size() + variable);
}

}  // namespace

Leapfrogging::Leapfrogging(const Space& space, const Settings& settings)
    : space_(space),
      given_(settings),
      settings_(with_defaults(space, settings)),
      scatter_(space, settings.seed),
      memory_{.swarm = Swarm(static_cast<std::size_t>(settings_.population)), .visited = Visited(space)} {}

std::vector<Ask> Leapfrogging::next(int count, const History&) {
  std::vector<Ask> asks;
  while (static_cast<int>(asks.size()) < count && !converged()) {
    std::optional<Ask> made = ask();
    if (!made) break;
    asks.push_back(*std::move(made));
  }
  return asks;
}

std::optional<std::size_t> Leapfrogging::next_player() const {
  const Player* const best = memory_.swarm.best();
  const bool leaps = best != nullptr && best->standing.rank != Rank::kFailed;
  // A little less than the half, so that the box of those that have arrived is below the tolerance in spite of
  // rounding.
  return memory_.swarm.worst_idle(leaps ? 0.49 * settings_.tolerance : 0.0);
}

std::optional<Ask> Leapfrogging::ask() {
  const std::optional<std::size_t> next = next_player();
  if (!next) return std::nullopt;
  Player* const player = &memory_.swarm.players()[*next];
  const bool starts = !player->placed();
  std::optional<Point> point = landing(*player);
  if (!point) return std::nullopt;
  player->out = ++memory_.asked;
  player->landing = *point;
  memory_.visited.add(*point);
  return Ask{.number = memory_.asked, .point = *std::move(point), .cells = {}, .purpose = starts ? "start" : "leap"};
}

// Where the player goes next; none: the whole space was asked for.
std::optional<Point> Leapfrogging::landing(const Player& player) {
  const Player* const best = memory_.swarm.best();
  const bool scatters = !player.placed() || best == nullptr || best->standing.rank == Rank::kFailed;
  if (scatters) return scatter_.next(memory_.visited, memory_.scattered);
  return memory_.visited.fresh([&](int attempt) { return leap(player, *best, memory_.asked + 1, attempt); });
}

Point Leapfrogging::leap(const Player& player, const Player& best, std::int64_t number, int attempt) const {
  Point point(space_.size());
  for (std::size_t i = 0; i < point.size(); ++i) {
    point[i] = space_.variable(i).kind == Kind::kChoice
                   ? other_choice(i, player.point[i], best.point[i], number, attempt)
                   : space_.snap(i, leap_over(i, player.point[i], best.point[i], number, attempt));
  }
  return point;
}

double Leapfrogging::leap_over(std::size_t i, double from, double best, std::int64_t number, int attempt) const {
  const double r = draw(settings_.seed, number, Purpose::kLeap, draw_index(space_, attempt, i));
  const double behind = std::clamp(best - (from - best), 0.0, 1.0);
  const double far = behind == best ? from : behind;
  return best + r * (far - best);
}

double Leapfrogging::other_choice(std::size_t i, double from, double best, std::int64_t number, int attempt) const {
  const std::int64_t choices = space_.levels(i), led = space_.level(i, best);
  if (space_.level(i, from) == led || choices == 1) return space_.at_level(i, led);
  const double r = draw(settings_.seed, number, Purpose::kCategory, draw_index(space_, attempt, i));
  if (r < 0.5) return space_.at_level(i, led);
  const auto others = static_cast<double>(choices - 1);
  const auto drawn = std::min(static_cast<std::int64_t>((2.0 * r - 1.0) * others), choices - 2);
  return space_.at_level(i, drawn + (drawn >= led ? 1 : 0));
}

absl::Status Leapfrogging::learn(const Outcome& outcome) {
  if (const absl::Status sound = check_outcome(outcome, space_.size()); !sound.ok()) return sound;
  if (outcome.ask > memory_.asked) return absl::NotFoundError(absl::StrCat("ask ", outcome.ask, " was never made"));
  if (outcome.ask == 0) {
    take_foreign(outcome);
    ++memory_.learned;
    return absl::OkStatus();
  }
  Player* const player = memory_.swarm.of_ask(outcome.ask);
  if (player == nullptr) {
    return absl::AlreadyExistsError(absl::StrCat("the outcome of ask ", outcome.ask, " was learned before"));
  }
  ++memory_.learned;
  player->out = 0;
  const Point landing = std::exchange(player->landing, {});
  const bool says_nothing = outcome.verdict == Verdict::kWithdrawn || outcome.verdict == Verdict::kBounded ||
                            (outcome.verdict == Verdict::kFailed && outcome.failure == FailureKind::kLimit);
  if (says_nothing || landing.empty()) return absl::OkStatus();
  player->point = landing;
  player->standing = standing_of(outcome);
  box_.reset();
  return absl::OkStatus();
}

// A person's design, or one from elsewhere.
void Leapfrogging::take_foreign(const Outcome& outcome) {
  const Point point = space_.snap(outcome.point);
  memory_.visited.add(point);
  if (outcome.verdict != Verdict::kEvaluated || memory_.swarm.stands_at(point)) return;
  Standing standing = standing_of(outcome);
  standing.since = memory_.asked;
  Player* const player = memory_.swarm.place_for_foreign();
  if (player == nullptr || !standing.better_than(player->standing)) return;
  player->point = point;
  player->standing = standing;
  box_.reset();
}

absl::Status Leapfrogging::amend(const Space& space) {
  if (const absl::Status sound = check_amendment(space_, space); !sound.ok()) return sound;
  for (Player& player : memory_.swarm.players()) {
    if (!player.idle() && !player.landing.empty()) {
      player.landing = point_in(space, space_, player.landing).value_or(Point());
    }
    if (!player.placed()) continue;
    const std::optional<Point> place = point_in(space, space_, player.point);
    player.point = place.value_or(Point());
    if (!place) player.standing = {};
  }
  memory_.visited = memory_.visited.in(space);
  space_ = space;
  scatter_ = Scatter(space, settings_.seed);
  box_.reset();
  return absl::OkStatus();
}

const Swarm::Box& Leapfrogging::box() const {
  if (!box_) box_ = memory_.swarm.box(settings_.share);
  return *box_;
}

bool Leapfrogging::stale() const {
  const Player* const best = memory_.swarm.best();
  const std::int64_t patience = std::int64_t{kPatience} * population();
  return space_.discrete() && memory_.swarm.all_placed() && best->standing.rank != Rank::kFailed &&
         memory_.asked - best->standing.since > patience;
}

bool Leapfrogging::converged() const {
  if (memory_.visited.full() || stale()) return true;
  if (!memory_.swarm.all_placed()) return false;
  // Failures alone are no swarm to close in: there is nothing in its middle.
  return memory_.swarm.best()->standing.rank != Rank::kFailed && box().largest_side < settings_.tolerance;
}

Progress Leapfrogging::progress() const {
  Progress progress{.asked = memory_.asked, .learned = memory_.learned};
  progress.converged = converged();
  if (const Player* const best = memory_.swarm.best(); best != nullptr && best->standing.rank == Rank::kFeasible) {
    progress.best = best->standing.value;
    progress.best_point = best->point;
  }
  if (memory_.swarm.best() != nullptr) {
    const Swarm::Box whole = memory_.swarm.box(1.0);
    progress.swarm_low = whole.low;
    progress.swarm_high = whole.high;
  }
  progress.sentence = sentence();
  return progress;
}

std::string Leapfrogging::sentence() const {
  const auto& players = memory_.swarm.players();
  const Player* const best = memory_.swarm.best();
  const auto count = [&](auto what) { return std::count_if(players.begin(), players.end(), what); };
  const auto placed = count([](const Player& player) { return player.placed(); });
  const auto out = count([](const Player& player) { return !player.idle(); });
  std::string end = best != nullptr && best->standing.rank == Rank::kFeasible ? "" : "; no feasible design so far";
  if (memory_.visited.full()) return absl::StrCat("all ", space_.count(), " designs have been tried", end);
  if (out > 0 && !next_player()) absl::StrAppend(&end, "; waiting for ", out, " outcomes");
  if (placed < std::ssize(players)) {
    return absl::StrCat("spreading out: ", placed, " of ", players.size(), " players stand on their first place", end);
  }
  if (best->standing.rank == Rank::kFailed) {
    return absl::StrCat("every design failed so far; spreading out further", end);
  }
  if (stale()) {
    return absl::StrCat("converged: nothing better in the last ", memory_.asked - best->standing.since, " designs",
                        end);
  }
  const std::string size = absl::StrFormat("%.2g of the range, in variable %d", box().largest_side, box().widest + 1);
  if (converged()) {
    return absl::StrFormat("converged: the swarm's largest side is %s (below %g)%s", size, settings_.tolerance, end);
  }
  return absl::StrFormat("leaping: the swarm's largest side is %s; converged below %g%s", size, settings_.tolerance,
                         end);
}

}  // namespace drover::search
