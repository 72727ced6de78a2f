#include "store/store.h"

#include <gtest/gtest.h>

#include <cmath>
#include <filesystem>

#include "server/store/made_events.h"
#include "store/reader.h"
#include "study/bytes.h"

namespace drover::store {
namespace {

TEST(Store, ComesBackAsItWasLeft) {
  const TestFolder folder;
  Appended head;
  {
    auto store = store_with_study(folder.path());
    ASSERT_TRUE(store.ok()) << store.status();
    ASSERT_TRUE(whole_run(**store, 1, -0.0).ok());
    head = (*store)->head();
  }
  auto store = Store::open(folder.path(), test_options());
  ASSERT_TRUE(store.ok()) << store.status();
  EXPECT_EQ((*store)->head().number, head.number);
  EXPECT_EQ((*store)->head().hash, head.hash);
  EXPECT_EQ((*store)->store_id(), "store-1");
  const auto studies = (*store)->open_studies();
  ASSERT_TRUE(studies.ok());
  ASSERT_EQ(studies->size(), 1u);
  EXPECT_EQ(studies->front().evaluated, 1);
  EXPECT_EQ(studies->front().learned, 1);
  EXPECT_EQ(studies->front().best, 1);
  EXPECT_EQ(studies->front().wall_us, 2'000'000);
}

TEST(Store, KeepsNumbersBitForBit) {
  const TestFolder folder;
  auto store = store_with_study(folder.path());
  ASSERT_TRUE(store.ok());
  ASSERT_TRUE(whole_run(**store, 1, -0.0).ok());
  auto reader = Reader::open((*store)->folder());
  ASSERT_TRUE(reader.ok());
  const auto candidate = (*reader)->candidate(1, 1);
  ASSERT_TRUE(candidate.ok() && candidate->has_value());
  EXPECT_TRUE(std::signbit(*study::unpack_double((*candidate)->values)));
  EXPECT_TRUE(std::signbit(*study::unpack_double((*candidate)->score->objectives())));
}

TEST(Store, UndoesARequestToItsSavepointAndTheRestStays) {
  const TestFolder folder;
  auto store = store_with_study(folder.path());
  ASSERT_TRUE(store.ok());
  ASSERT_TRUE((*store)->begin().ok());
  ASSERT_TRUE((*store)->savepoint().ok());
  ASSERT_TRUE((*store)->append(asks_issued(1)).ok());
  ASSERT_TRUE((*store)->release().ok());
  const Appended kept = (*store)->head();
  ASSERT_TRUE((*store)->savepoint().ok());
  ASSERT_TRUE((*store)->append(granted(1, 1)).ok());
  ASSERT_TRUE((*store)->rollback_to().ok());
  ASSERT_TRUE((*store)->release().ok());
  ASSERT_TRUE((*store)->commit().ok());
  EXPECT_EQ((*store)->head().number, kept.number);
  EXPECT_EQ((*store)->head().hash, kept.hash);
  EXPECT_FALSE((*store)->find_attempt(1, 1)->has_value());
  EXPECT_TRUE((*store)->find_run(1)->has_value());
}

TEST(Store, HasNothingOfATransactionThatWasNotCommitted) {
  const TestFolder folder;
  {
    auto store = store_with_study(folder.path());
    ASSERT_TRUE(store.ok());
    ASSERT_TRUE((*store)->begin().ok());
    ASSERT_TRUE((*store)->append(asks_issued(1)).ok());
  }
  auto store = Store::open(folder.path(), test_options());
  ASSERT_TRUE(store.ok());
  EXPECT_FALSE((*store)->find_run(1)->has_value());
}

// An event that does not fit is a bug of ours: it is refused whole, and the tables stay as they were.
TEST(Store, RefusesEventsThatDoNotFit) {
  const TestFolder folder;
  auto store = store_with_study(folder.path());
  ASSERT_TRUE(store.ok());
  ASSERT_TRUE(append(**store, asks_issued(1)).ok());
  ASSERT_TRUE(append(**store, granted(1, 1)).ok());
  EXPECT_FALSE(append(**store, granted(1, 1)).ok()) << "a fence that does not grow";
  EXPECT_FALSE(append(**store, granted(2, 1)).ok()) << "no such run";
  EXPECT_FALSE(append(**store, asks_issued(1)).ok()) << "a candidate twice";
  EXPECT_FALSE(append(**store, learned(1, 1.0, true)).ok()) << "runs of it are open";
  ASSERT_TRUE(append(**store, settled(1, 1, 1.0)).ok());
  EXPECT_FALSE(append(**store, settled(1, 1, 1.0)).ok()) << "settled twice";
  EXPECT_FALSE(append(**store, study::Event()).ok()) << "says nothing";
  ASSERT_TRUE(append(**store, learned(1, 1.0, true)).ok());
  EXPECT_FALSE(append(**store, learned(1, 1.0, true)).ok()) << "learned twice";
}

TEST(Store, LetsALateReportSettleAnAttemptThatWasBookedAsLost) {
  const TestFolder folder;
  auto store = store_with_study(folder.path());
  ASSERT_TRUE(store.ok());
  ASSERT_TRUE(append(**store, asks_issued(1)).ok());
  ASSERT_TRUE(append(**store, granted(1, 1)).ok());
  study::Event lost;
  lost.set_study(1);
  lost.mutable_attempt_lost()->set_run(1);
  lost.mutable_attempt_lost()->set_fence(1);
  ASSERT_TRUE(append(**store, lost).ok());
  EXPECT_TRUE(append(**store, settled(1, 1, 1.0)).ok());
  EXPECT_TRUE((*store)->find_attempt(1, 1)->value().settled);
}

TEST(Store, GivesTheStoredAnswerOfARequest) {
  const TestFolder folder;
  auto store = store_with_study(folder.path());
  ASSERT_TRUE(store.ok());
  study::Event answered;
  answered.mutable_answered()->set_request_id("r1");
  answered.mutable_answered()->set_principal("worker");
  answered.mutable_answered()->set_digest("d");
  answered.mutable_answered()->set_response(std::string("\0\xff", 2));
  ASSERT_TRUE(append(**store, answered).ok());
  const auto stored = (*store)->answer_of("r1");
  ASSERT_TRUE(stored.ok() && stored->has_value());
  EXPECT_EQ((*stored)->response, std::string("\0\xff", 2));
  EXPECT_FALSE((*store)->answer_of("r2")->has_value());
  EXPECT_FALSE(append(**store, answered).ok()) << "an id has one answer";
}

TEST(Store, HoldsLicencesUntilTheAttemptEnds) {
  const TestFolder folder;
  auto store = store_with_study(folder.path());
  ASSERT_TRUE(store.ok());
  ASSERT_TRUE(append(**store, asks_issued(1)).ok());
  ASSERT_TRUE(append(**store, granted(1, 1)).ok());
  EXPECT_EQ((*store)->live_runs()->front().attempts.front().licences.at("pool"), 1);
  ASSERT_TRUE(append(**store, settled(1, 1, 1.0)).ok());
  EXPECT_TRUE((*store)->live_runs()->empty());
}

TEST(Store, NoticesThatItIsBehindItsHighWaterMark) {
  const TestFolder folder;
  const std::string copy = folder.path() + ".copy";
  {
    auto store = store_with_study(folder.path());
    ASSERT_TRUE(store.ok());
    ASSERT_TRUE((*store)->checkpoint().ok());
    std::filesystem::copy(folder.path() + "/store.sqlite", copy);
    ASSERT_TRUE(whole_run(**store, 1, 1.0).ok());
  }
  std::filesystem::rename(copy, folder.path() + "/store.sqlite");
  std::filesystem::remove(folder.path() + "/store.sqlite-wal");
  const absl::Status behind = Store::open(folder.path(), test_options()).status();
  EXPECT_TRUE(absl::IsDataLoss(behind)) << behind;
  EXPECT_NE(behind.message().find("4 events are missing"), absl::string_view::npos) << behind;
  StoreOptions accepting = test_options();
  accepting.accept_lost_history = true;
  EXPECT_TRUE(Store::open(folder.path(), accepting).ok());
}

}  // namespace
}  // namespace drover::store
