#include <gtest/gtest.h>

#include <limits>

#include "server/ledger/bench.h"

namespace drover::ledger {
namespace {

class Reports : public testing::Test {
 protected:
  void SetUp() override {
    w1_ = bench_.session("w1", 2);
    ASSERT_TRUE(bench_.start(test_study(2)).ok());
    grant_ = bench_.grants(w1_, 1).at(0);
  }
  v1::Reception reception(const v1::AttemptReport& report) {
    return bench_.report(w1_, report)->receipts(0).reception();
  }

  Bench bench_;
  std::string w1_;
  v1::Grant grant_;
};

TEST_F(Reports, SettleARunOnceAndGiveTheSameReceiptAgain) {
  const auto first = bench_.report(w1_, evaluated(grant_, 1.0));
  const auto again = bench_.report(w1_, evaluated(grant_, 1.0));
  EXPECT_EQ(first->receipts(0).reception(), v1::RECEPTION_SETTLED);
  EXPECT_EQ(again->receipts(0).SerializeAsString(), first->receipts(0).SerializeAsString());
  EXPECT_EQ(bench_.count("SELECT evaluated FROM study"), 1);
}

TEST_F(Reports, CarryTheEventAndItsHashInTheirReceipt) {
  const auto answer = bench_.report(w1_, evaluated(grant_, 1.0));
  const v1::Receipt& receipt = answer->receipts(0);
  EXPECT_EQ(receipt.store_id(), "store-1");
  EXPECT_EQ(receipt.chain_hash(),
            bench_.text("SELECT hash FROM event WHERE number = " + std::to_string(receipt.event())));
}

TEST_F(Reports, OfAFenceThatWasNeverGrantedAreRefused) {
  v1::AttemptReport foreign = evaluated(grant_, 1.0);
  foreign.set_fence(grant_.fence() + 1);
  EXPECT_EQ(reception(foreign), v1::RECEPTION_REFUSED);
  foreign.set_run(4711);
  EXPECT_EQ(reception(foreign), v1::RECEPTION_REFUSED);
  EXPECT_EQ(bench_.count("SELECT evaluated FROM study"), 0);
}

TEST_F(Reports, OfAnotherWorkersAttemptAreRefused) {
  const std::string w2 = bench_.session("w2", 1);
  EXPECT_EQ(bench_.report(w2, evaluated(grant_, 1.0))->receipts(0).reception(), v1::RECEPTION_REFUSED);
}

TEST_F(Reports, OnOtherInputsAreRefused) {
  v1::AttemptReport other = evaluated(grant_, 1.0);
  other.set_input_digest("other");
  EXPECT_EQ(reception(other), v1::RECEPTION_REFUSED);
}

TEST_F(Reports, OfALossMakeTheRunWaitAgainUnderANewFence) {
  EXPECT_EQ(reception(lost(grant_, v1::LOSS_REASON_DAEMON_RESTART)), v1::RECEPTION_NOTED);
  const auto again = bench_.grants(w1_, 2);
  ASSERT_EQ(again.size(), 2u);
  EXPECT_EQ(again[0].run(), grant_.run());
  EXPECT_EQ(again[0].fence(), 2);
  EXPECT_EQ(bench_.count("SELECT failed FROM study"), 0) << "a loss is no failure";
}

TEST_F(Reports, OfSiteTroubleMakeTheRunWaitLonger) {
  EXPECT_EQ(reception(lost(grant_, v1::LOSS_REASON_SITE)), v1::RECEPTION_NOTED);
  const auto other = bench_.grants(w1_, 1);
  EXPECT_NE(other.at(0).run(), grant_.run());
  EXPECT_EQ(bench_.lease(w1_, 1)->grants_size(), 0);
  bench_.advance(absl::Seconds(6));
  EXPECT_EQ(bench_.grants(w1_, 1).at(0).run(), grant_.run());
}

TEST_F(Reports, OfALossDoNotUndoALateResult) {
  ASSERT_EQ(reception(lost(grant_, v1::LOSS_REASON_EXIT_UNKNOWN)), v1::RECEPTION_NOTED);
  EXPECT_EQ(reception(evaluated(grant_, 1.0)), v1::RECEPTION_SETTLED) << "found later, it is as good as any";
  EXPECT_EQ(bench_.count("SELECT evaluated FROM study"), 1);
}

TEST_F(Reports, ThatAreMalformedAreRefusedWhole) {
  v1::AttemptReport endless = evaluated(grant_, std::numeric_limits<double>::infinity());
  EXPECT_TRUE(absl::IsInvalidArgument(bench_.report(w1_, endless).status()));
  EXPECT_TRUE(absl::IsInvalidArgument(bench_.report(w1_, v1::AttemptReport()).status()));
  EXPECT_TRUE(absl::IsFailedPrecondition(bench_.report("no such session", evaluated(grant_, 1.0)).status()));
}

TEST_F(Reports, OfThreeKillsOnThreeWorkersSetTheRunAside) {
  v1::AttemptReport killed = lost(grant_, v1::LOSS_REASON_KILLED_FROM_OUTSIDE);
  killed.set_abnormal(true);
  ASSERT_EQ(reception(killed), v1::RECEPTION_NOTED);
  for (const char* const name : {"w2", "w3"}) {
    bench_.advance(absl::Minutes(1));
    const std::string worker = bench_.session(name, 1);
    const v1::Grant grant = bench_.grants(worker, 1).at(0);
    ASSERT_EQ(grant.run(), grant_.run());
    killed = lost(grant, v1::LOSS_REASON_KILLED_FROM_OUTSIDE);
    killed.set_abnormal(true);
    ASSERT_TRUE(bench_.report(worker, killed).ok());
  }
  EXPECT_EQ(bench_.text("SELECT life FROM run WHERE id = " + std::to_string(grant_.run())), "set_aside");
}

}  // namespace
}  // namespace drover::ledger
