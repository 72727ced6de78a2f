#include "study/plan.h"

#include <gtest/gtest.h>

#include "absl/strings/escaping.h"
#include "server/study/made_spec.h"
#include "study/bytes.h"

namespace drover::study {
namespace {

std::vector<double> numbers(const std::string& bytes) { return *unpack_doubles(bytes); }

TEST(Plan, GivesTheCodeItsInputsInItsOwnUnits) {
  const auto plan = plan_of(beam_study());
  const auto inputs = plan->inputs(std::vector<double>{2.5, 1}, 1);
  ASSERT_EQ(inputs.size(), 3u);
  EXPECT_EQ(inputs[0].name(), "height");
  EXPECT_EQ(inputs[0].number(), 25.0);  // 2.5 cm
  EXPECT_EQ(inputs[0].unit(), "mm");
  EXPECT_EQ(inputs[1].name(), "load");
  EXPECT_EQ(inputs[1].number(), 4.0);
  EXPECT_EQ(inputs[2].name(), "material");
  EXPECT_EQ(inputs[2].text(), "steel");
}

TEST(Plan, RoundsToTheStepOnce) {
  const auto plan = plan_of(beam_study());
  for (double x = 0.0; x <= 1.0; x += 0.01) {
    const double height = plan->user_values({x, 0.1})[0];
    EXPECT_EQ(height * 2.0, std::round(height * 2.0)) << x;
    EXPECT_GE(height, 2.0);
    EXPECT_LE(height, 8.0);
  }
}

TEST(Plan, ScoresMeansOverConditionsByTheirWeights) {
  const auto plan = plan_of(beam_study());
  // cost = 2 mass + load: 2 x 5 + 2 = 12 weighing 3/4, 2 x 5 + 4 = 14 weighing 1/4.
  const CandidateScore score =
      plan->score(std::vector<double>{2, 0}, std::vector<RunResult>{ran(1, 0, 5, 5), ran(0, 0, 4, 5)});
  EXPECT_EQ(score.verdict(), v1::CANDIDATE_VERDICT_FEASIBLE);
  EXPECT_DOUBLE_EQ(numbers(score.objectives())[0], 12.5);
  EXPECT_DOUBLE_EQ(numbers(score.constraints())[0], 0.5);  // the worst, in cm
  EXPECT_DOUBLE_EQ(score.cost_s(), 6.0);
}

TEST(Plan, TakesTheWorstConditionWhereThatIsAsked) {
  v1::StudySpec spec = beam_study();
  spec.mutable_objectives(0)->set_across(v1::ACROSS_WORST);
  const auto plan = plan_of(spec);
  const CandidateScore score =
      plan->score(std::vector<double>{2, 0}, std::vector<RunResult>{ran(0, 0, 4, 5), ran(1, 0, 5, 5)});
  EXPECT_DOUBLE_EQ(numbers(score.objectives())[0], 14.0);
}

TEST(Plan, KeepsTheAllowanceBackFromTheLimit) {
  const auto plan = plan_of(beam_study());
  // At most 1 cm with 10 % kept back: 9.5 mm is too much, by 0.05 of the limit's size.
  const CandidateScore score =
      plan->score(std::vector<double>{2, 0}, std::vector<RunResult>{ran(0, 0, 4, 5), ran(1, 0, 9.5, 5)});
  EXPECT_EQ(score.verdict(), v1::CANDIDATE_VERDICT_INFEASIBLE);
  EXPECT_NEAR(numbers(score.violation())[0], 0.05, 1e-12);
}

TEST(Plan, TakesTheMeanOfReplicates) {
  v1::StudySpec spec = beam_study();
  spec.set_replicates(2);
  const auto plan = plan_of(spec);
  EXPECT_EQ(plan->runs_per_candidate(), 4);
  const CandidateScore score =
      plan->score(std::vector<double>{2, 0},
                  std::vector<RunResult>{ran(0, 0, 4, 4), ran(0, 1, 4, 6), ran(1, 0, 5, 4), ran(1, 1, 5, 6)});
  EXPECT_DOUBLE_EQ(numbers(score.objectives())[0], 12.5);
}

TEST(Plan, NamesTheFirstRunThatFailedWithItsCondition) {
  const auto plan = plan_of(beam_study());
  RunResult broke = ran(1, 0, 0, 0);
  broke.report.set_ending(v1::ENDING_FAILED);
  broke.report.set_failure(v1::FAILURE_KIND_SIGNAL);
  broke.report.set_reason("it crashed");
  const CandidateScore score = plan->score(std::vector<double>{2, 0}, std::vector<RunResult>{broke, ran(0, 0, 4, 5)});
  EXPECT_EQ(score.verdict(), v1::CANDIDATE_VERDICT_FAILED);
  EXPECT_EQ(score.failure(), v1::FAILURE_KIND_SIGNAL);
  EXPECT_EQ(score.reason(), "condition 2 (load = 4 kN): it crashed");
  EXPECT_TRUE(score.objectives().empty()) << "never a made-up number";
}

TEST(Plan, FailsACandidateWhoseFormulaGivesNoNumber) {
  v1::StudySpec spec = beam_study();
  spec.mutable_derived(0)->set_formula("1 / (mass - 5)");
  const auto plan = plan_of(spec);
  const CandidateScore score =
      plan->score(std::vector<double>{2, 0}, std::vector<RunResult>{ran(0, 0, 4, 5), ran(1, 0, 5, 5)});
  EXPECT_EQ(score.verdict(), v1::CANDIDATE_VERDICT_FAILED);
  EXPECT_EQ(score.failure(), v1::FAILURE_KIND_CHECK);
}

TEST(Plan, CallsACandidateWithAMissingRunWithdrawn) {
  const auto plan = plan_of(beam_study());
  EXPECT_EQ(plan->score(std::vector<double>{2, 0}, std::vector<RunResult>{ran(0, 0, 4, 5)}).verdict(),
            v1::CANDIDATE_VERDICT_WITHDRAWN);
}

TEST(Plan, MinimisesTheNegativeOfWhatIsMaximisedAndShowsItAsItWas) {
  v1::StudySpec spec = beam_study();
  spec.mutable_objectives(0)->set_sense(v1::SENSE_MAXIMISE);
  const auto plan = plan_of(spec);
  const CandidateScore score =
      plan->score(std::vector<double>{2, 0}, std::vector<RunResult>{ran(0, 0, 4, 5), ran(1, 0, 5, 5)});
  EXPECT_DOUBLE_EQ(numbers(score.objectives())[0], -12.5);
  EXPECT_DOUBLE_EQ(plan->shown_objectives(score)[0].number(), 12.5);
  EXPECT_EQ(plan->shown_constraints(score)[0].unit(), "cm");
}

TEST(Plan, OrdersScoresByTheFeasibilityRules) {
  const auto made = [](v1::CandidateVerdict verdict, double objective, double violation) {
    CandidateScore score;
    score.set_verdict(verdict);
    score.set_objectives(pack_double(objective));
    score.set_violation(pack_double(violation));
    return score;
  };
  // Deb (2000): feasible first, by objective; then by violation; then failed.
  const std::vector<CandidateScore> sorted = {
      made(v1::CANDIDATE_VERDICT_FEASIBLE, 1, 0),   made(v1::CANDIDATE_VERDICT_FEASIBLE, 2, 0),
      made(v1::CANDIDATE_VERDICT_INFEASIBLE, 0, 1), made(v1::CANDIDATE_VERDICT_INFEASIBLE, -9, 2),
      made(v1::CANDIDATE_VERDICT_FAILED, 0, 0),     made(v1::CANDIDATE_VERDICT_WITHDRAWN, 0, 0)};
  for (std::size_t i = 0; i < sorted.size(); ++i) {
    for (std::size_t j = 0; j < sorted.size(); ++j)
      EXPECT_EQ(StudyPlan::better(sorted[i], sorted[j]), i < j) << i << " " << j;
  }
}

TEST(Plan, GivesEachRunADigestOfItsOwn) {
  const auto plan = plan_of(beam_study());
  const auto inputs = plan->inputs(std::vector<double>{2.5, 1}, 0);
  const std::string digest = StudyPlan::input_digest("c0de", inputs, 0);
  EXPECT_EQ(digest.size(), 32u);
  EXPECT_EQ(StudyPlan::input_digest("c0de", inputs, 0), digest);
  EXPECT_NE(StudyPlan::input_digest("c0df", inputs, 0), digest);
  EXPECT_NE(StudyPlan::input_digest("c0de", inputs, 1), digest);
  auto other = inputs;
  other[0].set_number(std::nextafter(other[0].number(), 100.0));
  EXPECT_NE(StudyPlan::input_digest("c0de", other, 0), digest);
  other = inputs;
  other[0].set_unit("cm");
  EXPECT_NE(StudyPlan::input_digest("c0de", other, 0), digest);
}

TEST(Plan, ComesAgainFromItsEffectiveSpec) {
  const CheckResult once = check_beam(beam_study());
  const CheckResult twice = check_beam(once.effective);
  ASSERT_TRUE(twice.problems.empty());
  EXPECT_EQ(twice.effective.SerializeAsString(), once.effective.SerializeAsString());
}

}  // namespace
}  // namespace drover::study
