// Random scripts of what workers, clients, crashes and time can do; after each step the invariants hold.
#include <gtest/gtest.h>

#include <random>

#include "server/ledger/bench.h"

namespace drover::ledger {
namespace {

constexpr int kBudget = 60;
constexpr int kTokens = 3;

void expect_invariants(Bench& bench) {
  // N2: a run settles once. N9: open + used <= budget. N10: never more holders than tokens. N4: every run is in one
  // state.
  EXPECT_EQ(
      bench.count(
          "SELECT count(*) FROM (SELECT run FROM attempt WHERE state = 'settled' GROUP BY run HAVING count(*) > 1)"),
      0);
  EXPECT_LE(bench.count("SELECT count(*) FROM run WHERE life IN ('open', 'set_aside', 'settled')"), kBudget);
  EXPECT_LE(bench.count("SELECT coalesce(sum(n), 0) FROM licence_hold"), kTokens);
  EXPECT_EQ(bench.count("SELECT runs - (SELECT count(*) FROM run) FROM study"), 0);
  EXPECT_EQ(bench.count("SELECT evaluated + failed - (SELECT count(*) FROM run WHERE life = 'settled') FROM study"), 0);
  EXPECT_EQ(bench.count("SELECT learned - (SELECT count(*) FROM learned) FROM study"), 0);
  EXPECT_EQ(bench.count("SELECT count(*) - max(number) FROM event"), 0);
  EXPECT_EQ(bench.count("SELECT count(*) FROM candidate WHERE (score IS NOT NULL) != (ended = runs)"), 0);
}

class Invariants : public testing::TestWithParam<int> {};

TEST_P(Invariants, HoldAfterEveryStep) {
  std::mt19937 random(static_cast<unsigned>(GetParam()));
  const auto one_of = [&](int n) { return static_cast<int>(random() % static_cast<unsigned>(n)); };
  Bench bench({.licences = {{"token", kTokens}}});
  std::vector<std::string> sessions;
  std::vector<std::pair<int, v1::Grant>> out;  // worker, grant
  std::int64_t incarnation = 1;
  for (const char* const name : {"w0", "w1", "w2"}) sessions.push_back(bench.session(name, 2));
  ASSERT_TRUE(bench.start(test_study(kBudget)).ok());
  for (int step = 0; step < 120; ++step) {
    const int worker = one_of(3);
    const std::string& session = sessions[static_cast<std::size_t>(worker)];
    switch (one_of(8)) {
      case 0:
      case 1:
      case 2:
        if (const auto leased = bench.lease(session, 2); leased.ok()) {
          for (const v1::Grant& grant : leased->grants()) out.emplace_back(worker, grant);
        }
        break;
      case 3:
      case 4: {
        if (out.empty()) break;
        const auto [holder, grant] = out[static_cast<std::size_t>(one_of(static_cast<int>(out.size())))];
        const int how = one_of(4);
        const v1::AttemptReport report = how == 0   ? failed(grant)
                                         : how == 1 ? lost(grant, v1::LOSS_REASON_REBOOT)
                                                    : evaluated(grant, static_cast<double>(one_of(100)));
        // Reports may come again: from the spool, after an answer that was lost.
        EXPECT_TRUE(bench.report(sessions[static_cast<std::size_t>(holder)], report).ok());
        break;
      }
      case 5:
        bench.advance(absl::Seconds(1 + one_of(30)));
        break;
      case 6:
        if (one_of(3) == 0) bench.advance(absl::Minutes(10));
        break;
      case 7:
        if (one_of(4) != 0) break;
        bench.restart();
        ++incarnation;
        for (int w = 0; w < 3; ++w) {
          const auto enrolled = bench.enrol("w" + std::to_string(w), 2, {}, incarnation);  // it knows of nothing
          ASSERT_TRUE(enrolled.ok()) << enrolled.status();
          sessions[static_cast<std::size_t>(w)] = enrolled->session();
        }
        break;
    }
    expect_invariants(bench);
    if (HasFailure()) FAIL() << "seed " << GetParam() << ", step " << step;
  }
}

INSTANTIATE_TEST_SUITE_P(Seeds, Invariants, testing::Range(1, 6));

}  // namespace
}  // namespace drover::ledger
