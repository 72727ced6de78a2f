#include "study/asking.h"

#include <gtest/gtest.h>

namespace drover::study {
namespace {

TEST(Asking, KeepsEachSlotBusyAndAQuarterMoreWaiting) {
  const Standing standing{.parallel = 8, .slots = 8};
  EXPECT_GE(candidates_wanted(standing), 10);
  EXPECT_LE(candidates_wanted(standing), 12);
  EXPECT_GE(candidates_wanted({.parallel = 1, .slots = 40}), 50) << "more slots came";
}

TEST(Asking, ByCandidateAsksUpToTheLookAheadWhateverTheSlots) {
  for (const int slots : {0, 1, 7, 100}) {
    const Standing standing{.order = v1::ORDER_CANDIDATE, .asked = 10, .absorbed = 6, .slots = slots, .look_ahead = 6};
    EXPECT_EQ(candidates_wanted(standing), 2) << slots;
  }
}

TEST(Asking, NeverExceedsTheBudget) {
  for (std::int64_t used = 0; used <= 20; ++used) {
    for (std::int64_t open = 0; used + open <= 20; ++open) {
      const Standing standing{
          .used = used, .open = open, .budget = 20, .runs_per_candidate = 3, .parallel = 64, .slots = 64};
      EXPECT_LE(used + open + 3 * candidates_wanted(standing), 20);
      EXPECT_EQ(budget_spent(standing), 20 - used - open < 3);
    }
  }
}

TEST(Asking, StopsWhenTheStudyIsNotActiveOrItsDeadlineHasPassed) {
  for (const auto state :
       {v1::STUDY_STATE_PAUSED, v1::STUDY_STATE_FINISHING, v1::STUDY_STATE_STOPPING, v1::STUDY_STATE_FAILED}) {
    EXPECT_EQ(candidates_wanted({.state = state, .parallel = 4}), 0);
  }
  EXPECT_EQ(candidates_wanted({.parallel = 4, .deadline_passed = true}), 0);
}

TEST(Asking, TurnsToFinishingForTheReasonThatCameFirst) {
  EXPECT_EQ(next_turn({}, true, false, "", {}).reason, v1::STOP_REASON_CONVERGED);
  EXPECT_EQ(next_turn({.deadline_passed = true}, false, false, "", {}).reason, v1::STOP_REASON_DEADLINE);
  EXPECT_EQ(next_turn({.used = 5, .budget = 5}, false, false, "", {}).reason, v1::STOP_REASON_BUDGET);
  EXPECT_EQ(next_turn({}, false, true, "", {}).reason, v1::STOP_REASON_CONVERGED);
  EXPECT_EQ(next_turn({}, false, false, "", {}).state, v1::STUDY_STATE_UNSPECIFIED);
}

TEST(Asking, TurnsToFinishedOnceNothingIsOpenAndAllIsAbsorbed) {
  Standing standing{.state = v1::STUDY_STATE_FINISHING, .absorbed = 3, .learned = 4, .open = 1};
  EXPECT_EQ(next_turn(standing, true, false, "", v1::STOP_REASON_BUDGET).state, v1::STUDY_STATE_UNSPECIFIED);
  standing.open = 0;
  EXPECT_EQ(next_turn(standing, true, false, "", v1::STOP_REASON_BUDGET).state, v1::STUDY_STATE_UNSPECIFIED);
  standing.absorbed = 4;
  const Turn turn = next_turn(standing, true, false, "", v1::STOP_REASON_BUDGET);
  EXPECT_EQ(turn.state, v1::STUDY_STATE_FINISHED);
  EXPECT_EQ(turn.reason, v1::STOP_REASON_BUDGET);
}

}  // namespace
}  // namespace drover::study
