// When a study asks its method for more candidates, for how many, and when it has come to its end.
//
// Pure functions of figures that the caller keeps; no clock, no state. Thread-safe.
#pragma once

#include <cstdint>
#include <string>

#include "drover/v1/study.pb.h"

namespace drover::study {

// How a study stands. Counts are of the study's whole life.
struct Standing {
  v1::StudyState state = v1::STUDY_STATE_ACTIVE;
  v1::Order order = v1::ORDER_COMPLETION;
  std::int64_t asked = 0;      // candidates that the search asked for
  std::int64_t absorbed = 0;   // outcomes that the search has learned
  std::int64_t learned = 0;    // outcomes that wait in order for it, absorbed ones too
  std::int64_t used = 0;       // settled runs: evaluated, failed or bounded
  std::int64_t open = 0;       // runs neither settled nor withdrawn
  std::int64_t set_aside = 0;  // of the open ones
  std::int64_t budget = 0;     // runs; 0: no limit
  int runs_per_candidate = 1;
  int parallel = 1;             // points that are usually out, by the spec
  int slots = 0;                // of live workers
  std::int64_t look_ahead = 0;  // ORDER_CANDIDATE
  bool deadline_passed = false;
};

// How many more candidates the method should be asked for now; 0 or more.
//
// ORDER_COMPLETION: so many that each slot has a run and that a quarter more wait, so that a Lease never waits for a
// method. ORDER_CANDIDATE: asks up to `absorbed` + look_ahead, whatever the workers do (design.md section 4).
// Never more than the budget has runs for.
std::int64_t candidates_wanted(const Standing& standing);

// Whether the budget has no runs left for another candidate. Settled and open runs count, lost attempts never do.
bool budget_spent(const Standing& standing);

// What the study should become, given what its method says; the reason is UNSPECIFIED while it goes on as it is.
struct Turn {
  v1::StudyState state = v1::STUDY_STATE_UNSPECIFIED;
  v1::StopReason reason = v1::STOP_REASON_UNSPECIFIED;
  std::string sentence;
};
// `converged`: the method has. `dry`: the method was asked and gave nothing although nothing of it is out.
// `sentence` is the method's progress. ACTIVE becomes FINISHING; FINISHING becomes FINISHED once nothing is open and
// all was absorbed.
Turn next_turn(const Standing& standing, bool converged, bool dry, const std::string& sentence,
               v1::StopReason reason_so_far);

}  // namespace drover::study
