// How well a point did, by the feasibility rules: feasible before infeasible before failed; of two feasible ones the
// smaller objective, of two infeasible ones the smaller violation.
//
// Deb (2000), "An efficient constraint handling method for genetic algorithms", Computer Methods in Applied Mechanics
// and Engineering 186, 311-338. A failed point is infeasible by an unknown amount.
#pragma once

#include <cstdint>
#include <tuple>

#include "absl/status/status.h"
#include "search/method.h"

namespace drover::search {

enum class Rank : std::uint8_t { kFeasible = 0, kInfeasible = 1, kFailed = 2, kNowhere = 3 };

struct Standing {
  Rank rank = Rank::kNowhere;
  double value = 0.0;      // objective, or violation
  std::int64_t since = 0;  // ask: of equal ones the older is better
  bool better_than(const Standing& other) const {
    return std::tie(rank, value, since) < std::tie(other.rank, other.value, other.since);
  }
};

// Of an outcome that is kEvaluated or kFailed.
Standing standing_of(const Outcome& outcome);

// Whether an outcome could be one of a space of `variables` variables: INVALID_ARGUMENT, in words, when sizes do not
// fit or a number is not finite.
absl::Status check_outcome(const Outcome& outcome, std::size_t variables);

}  // namespace drover::search
