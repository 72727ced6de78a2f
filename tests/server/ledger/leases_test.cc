#include <gtest/gtest.h>

#include "server/ledger/bench.h"

namespace drover::ledger {
namespace {

v1::RollEntry entry(const v1::Grant& grant, v1::RollState state) {
  v1::RollEntry made;
  made.set_run(grant.run());
  made.set_fence(grant.fence());
  made.set_state(state);
  return made;
}

TEST(Leases, GrantEachRunToOneWorker) {
  Bench bench;
  const std::string w1 = bench.session("w1", 2), w2 = bench.session("w2", 2);
  ASSERT_TRUE(bench.start(test_study(4)).ok());
  const auto first = bench.grants(w1, 2), second = bench.grants(w2, 2);
  ASSERT_EQ(first.size() + second.size(), 4u);
  std::set<std::int64_t> runs;
  for (const v1::Grant& grant : first) runs.insert(grant.run());
  for (const v1::Grant& grant : second) runs.insert(grant.run());
  EXPECT_EQ(runs.size(), 4u);
  EXPECT_EQ(bench.lease(w1, 2)->grants_size(), 0) << "its slots are taken";
}

TEST(Leases, OfASilentWorkerLapseAndItsRunsAreParkedUntilItIsHeard) {
  Bench bench;
  const std::string w1 = bench.session("w1", 1);
  ASSERT_TRUE(bench.start(test_study(2)).ok());
  const v1::Grant grant = bench.grants(w1, 1).at(0);
  ASSERT_TRUE(bench.renew(w1, grant, v1::ROLL_STATE_RUNNING).ok());
  EXPECT_EQ(bench.text("SELECT state FROM attempt"), "begun");
  bench.advance(absl::Minutes(8));  // grace after the start, and a lease
  EXPECT_EQ(bench.text("SELECT state FROM attempt"), "parked");
  const auto heard = bench.renew(w1, grant, v1::ROLL_STATE_RUNNING);
  ASSERT_TRUE(heard.ok());
  EXPECT_EQ(heard->orders(0).order(), v1::AttemptOrder::ORDER_KEEP);
  EXPECT_EQ(bench.text("SELECT state FROM attempt"), "begun");
}

TEST(Leases, AfterPatienceASecondAttemptIsGrantedAndTheFirstReportSettles) {
  Bench bench;
  const std::string w1 = bench.session("w1", 1);
  ASSERT_TRUE(bench.start(test_study(1)).ok());
  const v1::Grant first = bench.grants(w1, 1).at(0);
  bench.advance(absl::Minutes(8));
  const std::string w2 = bench.session("w2", 1);
  EXPECT_EQ(bench.lease(w2, 1)->grants_size(), 0) << "patience is not over";
  bench.advance(absl::Minutes(31));
  const v1::Grant second = bench.grants(bench.session("w3", 1), 1).at(0);
  EXPECT_EQ(second.run(), first.run());
  EXPECT_GT(second.fence(), first.fence());
  const auto late = bench.report(w1, evaluated(first, 1.0));
  ASSERT_TRUE(late.ok()) << late.status();
  EXPECT_EQ(late->receipts(0).reception(), v1::RECEPTION_SETTLED)
      << "hours of computing are not refused for being late";
}

TEST(Leases, TellTheOtherAttemptToStopOnceTheRunIsSettled) {
  Bench bench;
  const std::string w1 = bench.session("w1", 1);
  ASSERT_TRUE(bench.start(test_study(1)).ok());
  const v1::Grant first = bench.grants(w1, 1).at(0);
  bench.advance(absl::Minutes(8));
  bench.advance(absl::Minutes(31));
  const std::string w2 = bench.session("w2", 1);
  const v1::Grant second = bench.grants(w2, 1).at(0);
  ASSERT_TRUE(bench.report(w2, evaluated(second, 2.0)).ok());
  EXPECT_EQ(bench.renew(w1, first, v1::ROLL_STATE_RUNNING)->orders(0).order(), v1::AttemptOrder::ORDER_STOP);
  const auto duplicate = bench.report(w1, evaluated(first, 2.0));
  EXPECT_EQ(duplicate->receipts(0).reception(), v1::RECEPTION_DUPLICATE);
  EXPECT_EQ(bench.count("SELECT count(*) FROM attempt WHERE state = 'settled'"), 1);
}

TEST(RollCall, KeepsWhatRunsAfterARestartOfTheCoordinator) {
  Bench bench;
  const std::string w1 = bench.session("w1", 2);
  ASSERT_TRUE(bench.start(test_study(2)).ok());
  const auto grants = bench.grants(w1, 2);
  bench.restart();
  const auto enrolled = bench.enrol("w1", 2, {entry(grants[0], v1::ROLL_STATE_RUNNING)}, 2);
  ASSERT_TRUE(enrolled.ok()) << enrolled.status();
  EXPECT_EQ(enrolled->answers(0).order(), v1::ROLL_ORDER_KEEP);
  // What the worker has no record of waits again at once, and may go to the same worker.
  const v1::Grant again = bench.grants(enrolled->session(), 1).at(0);
  EXPECT_EQ(again.run(), grants[1].run());
  EXPECT_EQ(again.fence(), grants[1].fence() + 1);
  EXPECT_EQ(bench.report(enrolled->session(), evaluated(grants[0], 1.0))->receipts(0).reception(),
            v1::RECEPTION_SETTLED);
}

TEST(RollCall, TakesBackWhatNeverBegan) {
  Bench bench;
  const std::string w1 = bench.session("w1", 1);
  ASSERT_TRUE(bench.start(test_study(1)).ok());
  const v1::Grant grant = bench.grants(w1, 1).at(0);
  const auto enrolled = bench.enrol("w1", 1, {entry(grant, v1::ROLL_STATE_NOT_BEGUN)}, 2);
  EXPECT_EQ(enrolled->answers(0).order(), v1::ROLL_ORDER_FORGET);
  EXPECT_EQ(bench.grants(enrolled->session(), 1).at(0).run(), grant.run());
}

TEST(RollCall, HoldsRunsOfANewerStoreAndStopsThoseThatAreOver) {
  Bench bench;
  const std::string w1 = bench.session("w1", 1);
  ASSERT_TRUE(bench.start(test_study(1)).ok());
  const v1::Grant grant = bench.grants(w1, 1).at(0);
  ASSERT_TRUE(bench.report(w1, evaluated(grant, 1.0)).ok());
  v1::Grant unknown = grant;
  unknown.set_run(1000);
  const auto enrolled =
      bench.enrol("w1", 1, {entry(grant, v1::ROLL_STATE_RUNNING), entry(unknown, v1::ROLL_STATE_RUNNING)}, 2);
  EXPECT_EQ(enrolled->answers(0).order(), v1::ROLL_ORDER_STOP);
  EXPECT_EQ(enrolled->answers(1).order(), v1::ROLL_ORDER_HOLD);
}

TEST(RollCall, OfASecondDaemonUnderOneNameIsRefused) {
  Bench bench;
  ASSERT_TRUE(bench.enrol("w1", 1, {}, 5).ok());
  EXPECT_TRUE(absl::IsFailedPrecondition(bench.enrol("w1", 1, {}, 4).status()));
  EXPECT_TRUE(bench.enrol("w1", 1, {}, 6).ok());
}

TEST(Licences, AreNeverGivenOutTwice) {
  Bench bench({.licences = {{"token", 1}}});
  const std::string w1 = bench.session("w1", 2), w2 = bench.session("w2", 2);
  ASSERT_TRUE(bench.start(test_study(4)).ok());
  const v1::Grant grant = bench.grants(w1, 1).at(0);
  EXPECT_EQ(bench.lease(w2, 2)->grants_size(), 0);
  ASSERT_TRUE(bench.report(w1, failed(grant)).ok());
  EXPECT_EQ(bench.grants(w2, 1).size(), 1u);
  EXPECT_EQ(bench.lease(w1, 2)->grants_size(), 0);
}

}  // namespace
}  // namespace drover::ledger
