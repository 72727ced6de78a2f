// A store that may not grow, as on a full disk: requests are refused whole, memory and store stay together, and work goes on
// when there is space.
#include <gtest/gtest.h>

#include "server/ledger/bench.h"

namespace drover::ledger {
namespace {

TEST(FullDisk, RefusesWholeRequestsAndLosesNothingThatWasAcknowledged) {
  Bench bench({.most_pages = 90});
  std::string w1 = bench.session("w1", 4);
  ASSERT_TRUE(bench.start(test_study(500)).ok());
  int acknowledged = 0, refused = 0;
  std::vector<v1::Grant> kept;  // granted, and not acknowledged
  for (int tries = 0; refused < 50 && tries < 5000; ++tries) {
    const auto leased = bench.lease(w1, 4);
    if (leased.ok()) kept.insert(kept.end(), leased->grants().begin(), leased->grants().end());
    if (!leased.ok()) {
      EXPECT_TRUE(absl::IsResourceExhausted(leased.status())) << leased.status();
      ++refused;
    }
    if (kept.empty()) continue;
    const auto reported = bench.report(w1, evaluated(kept.back(), 1.0));
    if (reported.ok()) {
      ++acknowledged;
      kept.pop_back();
    } else {
      EXPECT_TRUE(absl::IsResourceExhausted(reported.status())) << reported.status();
      ++refused;
    }
  }
  ASSERT_GT(acknowledged, 0);
  ASSERT_GE(refused, 50) << "the disk really was full";
  EXPECT_EQ(bench.count("SELECT count(*) FROM run WHERE life = 'settled'"), acknowledged);
  EXPECT_EQ(bench.count("SELECT count(*) - max(number) FROM event"), 0);

  bench.restart_with_space();  // checks the chain of all events

  EXPECT_EQ(bench.count("SELECT count(*) FROM run WHERE life = 'settled'"), acknowledged);
  std::vector<v1::RollEntry> roll;
  for (const v1::Grant& grant : kept) {
    v1::RollEntry& entry = roll.emplace_back();
    entry.set_run(grant.run());
    entry.set_fence(grant.fence());
    entry.set_state(v1::ROLL_STATE_ENDED);
  }
  w1 = bench.enrol("w1", 4, roll, 2)->session();
  for (const v1::Grant& grant : kept) {
    EXPECT_EQ(bench.report(w1, evaluated(grant, 1.0))->receipts(0).reception(), v1::RECEPTION_SETTLED);
  }
  EXPECT_EQ(bench.grants(w1, 4).size(), 4u) << "and the study goes on";
}

}  // namespace
}  // namespace drover::ledger
