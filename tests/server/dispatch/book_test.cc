#include "dispatch/book.h"

#include <gtest/gtest.h>

#include "server/dispatch/made_book.h"

namespace drover::dispatch {
namespace {

constexpr absl::Duration kStart = absl::Hours(1);

class BookTest : public testing::Test {
 protected:
  BookTest() : book_(Times{}) {
    book_.add_study(study_of(1));
    book_.add_session(worker(1, "w1"));
    book_.add_session(worker(2, "w2"));
    book_.start(kStart);
  }
  void apply(const study::Event& event, absl::Duration now = kStart) { ASSERT_TRUE(book_.apply(event, now).ok()); }
  // Turns as the ledger does, a second at a time.
  void pass(absl::Duration from, absl::Duration to) {
    for (absl::Duration now = from; now <= to; now += absl::Seconds(1)) book_.turn(now);
  }

  Book book_;
};

TEST_F(BookTest, GivesEachWaitingRunOnce) {
  book_.add_run(run_of(1));
  EXPECT_EQ(book_.pick(1, kStart), 1);
  apply(granted(1, 1, 1));
  EXPECT_EQ(book_.pick(2, kStart), std::nullopt);
  EXPECT_EQ(book_.run(1)->fence, 1);
}

TEST_F(BookTest, RefusesAFenceThatDoesNotGrow) {
  book_.add_run(run_of(1));
  apply(granted(1, 3, 1));
  apply(lost(1, 3, v1::LOSS_REASON_REBOOT));
  EXPECT_FALSE(book_.apply(granted(1, 3, 1), kStart).ok());
  EXPECT_TRUE(book_.apply(granted(1, 4, 1), kStart).ok());
}

TEST_F(BookTest, PrefersPriorityThenFewerAttemptsOutThenTheOlderRun) {
  book_.add_study(study_of(2));
  book_.add_study(study_of(3, 5));
  for (const auto& [run, study] : {std::pair{1, 1}, {2, 1}, {3, 2}, {4, 3}}) book_.add_run(run_of(run, study));
  EXPECT_EQ(book_.pick(1, kStart), 4);
  apply(granted(4, 1, 1));
  EXPECT_EQ(book_.pick(1, kStart), 1);
  apply(granted(1, 1, 1));
  EXPECT_EQ(book_.pick(2, kStart), 3) << "study 2 has nothing out";
  apply(granted(3, 1, 2));
  EXPECT_EQ(book_.pick(2, kStart), 2);
}

TEST_F(BookTest, GivesOnlyWhatTheWorkerCanRun) {
  Study tagged = study_of(1);
  tagged.tags = {"gpu"};
  book_.add_study(tagged);
  book_.add_run(run_of(1));
  EXPECT_EQ(book_.pick(1, kStart), std::nullopt);
  Session able = worker(3, "w3");
  able.tags = {"gpu", "big"};
  book_.add_session(able);
  EXPECT_EQ(book_.pick(3, kStart), 1);
  able = worker(4, "w4");
  able.tags = {"gpu"};
  able.code_digests = {"another version"};
  book_.add_session(able);
  EXPECT_EQ(book_.pick(4, kStart), std::nullopt);
}

TEST_F(BookTest, GivesNothingThatWouldOutlastTheMachine) {
  book_.add_run(run_of(1));
  book_.set_time_left(1, absl::Minutes(9), kStart);
  EXPECT_EQ(book_.pick(1, kStart), std::nullopt) << "the code may take ten minutes";
  book_.set_time_left(1, absl::Minutes(11), kStart);
  EXPECT_EQ(book_.pick(1, kStart), 1);
}

TEST_F(BookTest, GivesNothingOfAStudyThatIsPaused) {
  book_.add_run(run_of(1));
  book_.set_granting(1, false);
  EXPECT_EQ(book_.pick(1, kStart), std::nullopt);
}

TEST_F(BookTest, CountsSlotsThatOpenAttemptsTake) {
  for (int run = 1; run <= 3; ++run) book_.add_run(run_of(run));
  apply(granted(1, 1, 1));
  EXPECT_EQ(book_.free_slots(1), 1);
  apply(granted(2, 1, 1));
  EXPECT_EQ(book_.free_slots(1), 0);
  apply(settled(1, 1));
  EXPECT_EQ(book_.free_slots(1), 1);
}

TEST_F(BookTest, KeepsTheSlotOfAnAttemptWhoseRunIsOver) {
  book_.add_run(run_of(1));
  apply(granted(1, 1, 1));
  apply(parked(1, 1));
  apply(released(1, 1));
  apply(granted(1, 2, 2));
  apply(settled(1, 2));
  EXPECT_EQ(book_.free_slots(1), 1) << "the first attempt may well be running";
  EXPECT_EQ(book_.open_count(1), 0);
  apply(lost(1, 1, v1::LOSS_REASON_DAEMON_RESTART));
  EXPECT_EQ(book_.free_slots(1), 2);
  EXPECT_EQ(book_.run(1), nullptr) << "and then it is forgotten";
}

TEST_F(BookTest, LetsALeaseLapseAfterItsTimeAndNotDuringTheGrace) {
  const Times times;
  EXPECT_TRUE(book_.lapsed(kStart + times.lease * 2).empty()) << "grace after a start";
  pass(kStart, kStart + times.grace);
  EXPECT_EQ(book_.lapsed(kStart + times.grace + absl::Seconds(1)).size(), 2u);
  book_.heard(1, kStart + times.grace);
  EXPECT_EQ(book_.lapsed(kStart + times.grace + absl::Seconds(1)), std::vector<std::int64_t>{2});
  EXPECT_EQ(book_.lapsed(kStart + times.grace + times.lease + absl::Seconds(1)).size(), 2u);
}

TEST_F(BookTest, BlamesNoWorkerForItsOwnAbsence) {
  const Times times;
  pass(kStart, kStart + times.grace);
  const absl::Duration back = kStart + times.grace + absl::Minutes(10);
  book_.heard(1, kStart + times.grace);
  book_.turn(back);  // ten minutes late
  EXPECT_TRUE(book_.lapsed(back + absl::Minutes(10)).empty());
  pass(back, back + absl::Minutes(12) + absl::Seconds(1));
  EXPECT_EQ(book_.lapsed(back + absl::Minutes(12) + absl::Seconds(1)).size(), 2u);
}

TEST_F(BookTest, AllowsASecondAttemptAfterPatienceButNeverToTheSameWorker) {
  book_.add_run(run_of(1));
  apply(granted(1, 1, 1));
  apply(parked(1, 1));
  book_.mark_lapsed(1);
  EXPECT_TRUE(book_.impatient(kStart + absl::Minutes(30)).empty());
  EXPECT_EQ(book_.impatient(kStart + absl::Minutes(31)), (std::vector<Key>{{1, 1}}));
  apply(released(1, 1), kStart + absl::Minutes(31));
  EXPECT_EQ(book_.pick(1, kStart + absl::Minutes(31)), std::nullopt);
  EXPECT_EQ(book_.pick(2, kStart + absl::Minutes(31)), 1);
}

TEST_F(BookTest, BacksOffAfterSiteTroubleAndNotAfterAReboot) {
  book_.add_run(run_of(1));
  absl::Duration now = kStart;
  absl::Duration wait = absl::Seconds(5);
  for (std::int64_t fence = 1; fence <= 10; ++fence) {
    apply(granted(1, fence, 1), now);
    apply(lost(1, fence, v1::LOSS_REASON_SITE), now);
    EXPECT_EQ(book_.pick(1, now + wait - absl::Milliseconds(1)), std::nullopt) << "loss " << fence;
    EXPECT_EQ(book_.pick(1, now + wait), 1) << "loss " << fence;
    now += wait;
    wait = std::min(wait * 2, absl::Minutes(10));
  }
  apply(granted(1, 11, 1), now);
  apply(lost(1, 11, v1::LOSS_REASON_REBOOT), now);
  EXPECT_EQ(book_.pick(1, now), 1);
}

TEST_F(BookTest, IsPoisonedByKillsOnThreeWorkersAndNotByThreeOnOne) {
  book_.add_session(worker(3, "w3"));
  book_.add_run(run_of(1));
  std::int64_t fence = 0;
  const auto kill_on = [&](std::int64_t session) {
    apply(granted(1, ++fence, session));
    apply(lost(1, fence, v1::LOSS_REASON_KILLED_FROM_OUTSIDE, true));
  };
  for (int n = 0; n < 3; ++n) kill_on(1);
  EXPECT_FALSE(book_.poisonous(*book_.run(1)));
  kill_on(2);
  EXPECT_FALSE(book_.poisonous(*book_.run(1)));
  kill_on(3);
  EXPECT_TRUE(book_.poisonous(*book_.run(1)));
}

TEST_F(BookTest, ForgetsTheOldSessionOfAWorker) {
  Session again = worker(9, "w1");
  again.token = "new token";
  book_.add_session(again);
  EXPECT_EQ(book_.session_by_token("token w1"), nullptr);
  EXPECT_EQ(book_.session_of_worker("w1")->id, 9);
}

TEST_F(BookTest, RefusesEventsThatDoNotFit) {
  EXPECT_FALSE(book_.apply(granted(7, 1, 1), kStart).ok());
  book_.add_run(run_of(1));
  EXPECT_FALSE(book_.apply(parked(1, 1), kStart).ok());
  EXPECT_FALSE(book_.apply(granted(1, 1, 77), kStart).ok());
  apply(granted(1, 1, 1));
  apply(settled(1, 1));
  EXPECT_FALSE(book_.apply(settled(1, 1), kStart).ok());
}

}  // namespace
}  // namespace drover::dispatch
