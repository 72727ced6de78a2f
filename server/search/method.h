// What every search method is: a pure state machine between asks and outcomes.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "search/space.h"

namespace drover::search {

enum class Verdict { kEvaluated, kFailed, kWithdrawn, kBounded };
// Why a design failed. A time limit is a reason of its own: it says little about the design.
enum class FailureKind { kNone, kCode, kMemory, kSignal, kLimit, kCheck };

// A part of a candidate's work: how often it is run under one condition, at which fidelity. No cells: all conditions,
// with the study's replicates.
struct Cell {
  int condition = 0;
  int replicates = 1;
  int fidelity = 0;  // index of the study's code; 0: the fine one
};

// A point that a method wants to know about.
struct Ask {
  std::int64_t number = 0;  // 1, 2, 3... in the order of asking
  Point point;              // on the space: inside [0, 1], discrete coordinates on a level
  std::vector<Cell> cells;
  std::string purpose;  // why it is asked, one or two words, for people: "start", "leap"
};

// What became of a candidate. Everything is minimised.
struct Outcome {
  std::int64_t ask = 0;  // 0: the method did not ask for it (a person's, an imported one)
  Point point;
  Verdict verdict = Verdict::kEvaluated;
  FailureKind failure = FailureKind::kNone;
  std::vector<double> objectives;   // empty unless kEvaluated or kBounded
  std::vector<double> variances;    // of the objectives' estimates; empty: not known
  double violation = 0.0;           // 0: feasible; otherwise how far outside, scaled and summed
  std::vector<double> constraints;  // each one's scaled violation, 0 or more
  double cost = 0.0;                // seconds of computing
};

struct Progress {
  std::int64_t asked = 0;
  std::int64_t learned = 0;
  std::optional<double> best;  // none before the first feasible outcome
  Point best_point;
  Point swarm_low, swarm_high;  // the swarm's box; empty for methods without a swarm
  std::int64_t restarts = 0;
  bool converged = false;
  std::string sentence;  // what it does, waits for, or why it would stop
};

// Settled outcomes by learn position: 1, 2, 3... Results are not copied into a method's state.
class History {
 public:
  virtual ~History() = default;
  virtual std::int64_t size() const = 0;
  virtual absl::StatusOr<Outcome> outcome(std::int64_t position) const = 0;  // NOT_FOUND outside 1..size()
};

struct Settings {
  std::string method;
  std::uint64_t seed = 0;
  int parallel = 1;        // how many points are usually out; 1 or more
  int population = 0;      // 0: the method's default
  double tolerance = 0.0;  // share of a variable's range; 0: the method's default
  double share = 0.0;      // share of the swarm that has to lie within the tolerance; 0: the method's default
};

// Deterministic: the state is a function of (space, settings, the calls of next, learn and amend in order). Pure: no
// clock, file, thread, environment, locale or global state. Not thread-safe; one thread drives a method at a time.
// After an error the object is as it was before the call.
class SearchMethod {
 public:
  virtual ~SearchMethod() = default;

  // At most `count` asks, numbered on from the last one. Fewer, or none, when it must wait for outcomes or has
  // converged; progress() then says which. next(a) and then next(b) give what next(a + b) gives. A call that returns
  // none changes nothing. In a space of discrete variables alone no point is ever asked twice.
  virtual std::vector<Ask> next(int count, const History& history) = 0;

  // One outcome, in any order, once an ask; cheap. NOT_FOUND: never asked. ALREADY_EXISTS: learned before.
  // INVALID_ARGUMENT: wrong sizes, or a number that is not finite. Outcomes with ask 0 are taken where they help.
  virtual absl::Status learn(const Outcome& outcome) = 0;

  // A person changed the bounds; variables keep their number and kinds.
  virtual absl::Status amend(const Space& space) = 0;

  virtual Progress progress() const = 0;

  // Everything that influences the future, as bytes: equal states give equal bytes, and the size is bounded by the
  // population, not by the number of runs (a space of discrete variables alone also keeps which points were asked).
  virtual std::string save() const = 0;
  // Distrusts the bytes: another method, space or settings, a later format, cut or flipped bytes are INVALID_ARGUMENT
  // or DATA_LOSS, and the object is unchanged.
  virtual absl::Status load(std::string_view bytes, const History& history) = 0;

  // Of the method's behaviour: grows with each change that would change asks.
  virtual int revision() const = 0;
};

}  // namespace drover::search
