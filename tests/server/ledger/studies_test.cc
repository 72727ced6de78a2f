#include <gtest/gtest.h>

#include "server/ledger/bench.h"

namespace drover::ledger {
namespace {

std::int64_t state(Bench& bench) { return bench.count("SELECT state FROM study"); }

// Runs the study to its end on one worker; how many runs it took.
int run_out(Bench& bench, const std::string& worker) {
  int runs = 0;
  eventually([&] {
    const auto leased = bench.lease(worker, 2);
    for (const v1::Grant& grant : leased->grants()) {
      EXPECT_TRUE(bench.report(worker, evaluated(grant, static_cast<double>(++runs))).ok());
    }
    return state(bench) == v1::STUDY_STATE_FINISHED;
  });
  return runs;
}

TEST(Studies, RunTheirBudgetAndFinish) {
  Bench bench;
  const std::string w1 = bench.session("w1", 2);
  ASSERT_TRUE(bench.start(test_study(9)).ok());
  EXPECT_EQ(run_out(bench, w1), 9);
  EXPECT_EQ(bench.count("SELECT reason FROM study"), v1::STOP_REASON_BUDGET);
  EXPECT_EQ(bench.count("SELECT best FROM study"), 1) << "the first had the least height";
  EXPECT_EQ(bench.count("SELECT absorbed_through FROM search_state"), 9);
}

TEST(Studies, AreKeptWithTheirMethodsRevisionSeedAndMachine) {
  Bench bench;
  bench.session("w1", 1);
  ASSERT_TRUE(bench.start(test_study(1)).ok());
  EXPECT_GE(bench.count("SELECT method_revision FROM study"), 1);
  EXPECT_EQ(bench.text("SELECT method FROM study"), "space-filling");
  EXPECT_EQ(bench.text("SELECT fingerprint FROM study"), "machine");
}

TEST(Studies, GoOnAfterARestart) {
  Bench bench;
  std::string w1 = bench.session("w1", 2);
  ASSERT_TRUE(bench.start(test_study(9)).ok());
  for (int n = 0; n < 3; ++n) ASSERT_TRUE(bench.report(w1, evaluated(bench.grants(w1, 1).at(0), 1.0 + n)).ok());
  bench.restart();
  w1 = bench.enrol("w1", 2, {}, 2)->session();
  EXPECT_EQ(run_out(bench, w1), 6);
}

TEST(Studies, WithANameThatIsTakenAreRefused) {
  Bench bench;
  bench.session("w1", 1);
  ASSERT_TRUE(bench.start(test_study(1)).ok());
  EXPECT_TRUE(absl::IsAlreadyExists(bench.start(test_study(1)).status()));
}

TEST(Studies, WithProblemsAreRefusedWithAllOfThem) {
  Bench bench;
  bench.session("w1", 1);
  v1::StudySpec spec = test_study(1);
  spec.mutable_codes(0)->set_code("hlil");
  const absl::Status refused = bench.start(spec).status();
  EXPECT_TRUE(absl::IsInvalidArgument(refused));
  EXPECT_NE(refused.message().find("hlil"), absl::string_view::npos);
  EXPECT_EQ(bench.count("SELECT count(*) FROM study"), 0);
}

TEST(Studies, ThatArePausedGrantNothingAndKeepWhatRuns) {
  Bench bench;
  const std::string w1 = bench.session("w1", 2);
  ASSERT_TRUE(bench.start(test_study(100)).ok());
  const v1::Grant grant = bench.grants(w1, 1).at(0);
  ASSERT_TRUE(bench.change("s", pause_study).ok());
  EXPECT_EQ(bench.lease(w1, 1)->grants_size(), 0);
  EXPECT_EQ(bench.renew(w1, grant, v1::ROLL_STATE_RUNNING)->orders(0).order(), v1::AttemptOrder::ORDER_KEEP);
  EXPECT_EQ(bench.report(w1, evaluated(grant, 1.0))->receipts(0).reception(), v1::RECEPTION_SETTLED);
  ASSERT_TRUE(bench.change("s", resume_study).ok());
  EXPECT_EQ(bench.grants(w1, 1).size(), 1u);
}

TEST(Studies, ThatAreStoppedWithdrawWhatWaitsAndEndWhenWhatRunsHasEnded) {
  Bench bench;
  const std::string w1 = bench.session("w1", 1);
  ASSERT_TRUE(bench.start(test_study(4)).ok());
  const v1::Grant grant = bench.grants(w1, 1).at(0);
  ASSERT_TRUE(bench.change("s", stop_study).ok());
  EXPECT_EQ(state(bench), v1::STUDY_STATE_STOPPING);
  EXPECT_EQ(bench.renew(w1, grant, v1::ROLL_STATE_RUNNING)->orders(0).order(), v1::AttemptOrder::ORDER_STOP);
  v1::AttemptReport stopped = lost(grant, v1::LOSS_REASON_UNSPECIFIED);
  stopped.set_ending(v1::ENDING_STOPPED);
  ASSERT_TRUE(bench.report(w1, stopped).ok());
  EXPECT_EQ(state(bench), v1::STUDY_STATE_STOPPED);
  EXPECT_EQ(bench.count("SELECT count(*) FROM run WHERE life != 'withdrawn'"), 0);
  EXPECT_TRUE(absl::IsFailedPrecondition(bench.change("s", resume_study).status()));
}

TEST(Studies, ThatAreStoppedStillTakeAResultThatCameFirst) {
  Bench bench;
  const std::string w1 = bench.session("w1", 1);
  ASSERT_TRUE(bench.start(test_study(4)).ok());
  const v1::Grant grant = bench.grants(w1, 1).at(0);
  ASSERT_TRUE(bench.change("s", stop_study).ok());
  EXPECT_EQ(bench.report(w1, evaluated(grant, 1.0))->receipts(0).reception(), v1::RECEPTION_SETTLED);
  EXPECT_EQ(state(bench), v1::STUDY_STATE_STOPPED);
  EXPECT_EQ(bench.count("SELECT evaluated FROM study"), 1);
}

TEST(Studies, PastTheirDeadlineWithdrawWhatWaitsAndFinishWhatRuns) {
  Bench bench;
  const std::string w1 = bench.session("w1", 1);
  v1::StudySpec spec = test_study(100);
  spec.mutable_budget()->mutable_deadline()->set_seconds(1'800'000'000 + 60);
  ASSERT_TRUE(bench.start(spec).ok());
  const v1::Grant grant = bench.grants(w1, 1).at(0);
  bench.advance(absl::Seconds(62));
  EXPECT_EQ(state(bench), v1::STUDY_STATE_FINISHING);
  EXPECT_EQ(bench.lease(w1, 1)->grants_size(), 0);
  ASSERT_TRUE(bench.report(w1, evaluated(grant, 1.0)).ok());
  EXPECT_TRUE(eventually([&] { return state(bench) == v1::STUDY_STATE_FINISHED; }));
  EXPECT_EQ(bench.count("SELECT reason FROM study"), v1::STOP_REASON_DEADLINE);
}

TEST(Studies, ByCandidateAreAskedFromExactlyTheOutcomesThatTheLookAheadSays) {
  Bench bench;
  const std::string w1 = bench.session("w1", 2);
  v1::StudySpec spec = test_study(20);
  spec.mutable_search()->set_order(v1::ORDER_CANDIDATE);
  spec.mutable_search()->set_look_ahead(3);
  ASSERT_TRUE(bench.start(spec).ok());
  EXPECT_EQ(run_out(bench, w1), 20);
  EXPECT_EQ(bench.count("SELECT count(*) FROM ask WHERE learned_through != max(0, number - 3)"), 0);
}

}  // namespace
}  // namespace drover::ledger
