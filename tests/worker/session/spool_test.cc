#include "session/spool.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cstdlib>
#include <filesystem>
#include <fstream>

#include "absl/time/clock.h"
#include "process/files.h"

namespace drover::session {
namespace {

using ::testing::HasSubstr;

class SpoolTest : public ::testing::Test {
 protected:
  SpoolTest() {
    std::string path = ::testing::TempDir() + "/spool-XXXXXX";
    EXPECT_NE(mkdtemp(path.data()), nullptr);
    folder_ = path + "/spool";
  }
  std::unique_ptr<Spool> open() {
    absl::StatusOr<std::unique_ptr<Spool>> spool = Spool::open(folder_, files_);
    EXPECT_TRUE(spool.ok()) << spool.status();
    return spool.ok() ? *std::move(spool) : nullptr;
  }
  static v1::Grant grant(std::int64_t run, std::int64_t fence = 1) {
    v1::Grant made;
    made.set_run(run);
    made.set_fence(fence);
    made.set_study("penstock");
    return made;
  }
  static v1::AttemptReport report(std::int64_t run, const std::string& reason) {
    v1::AttemptReport made;
    made.set_run(run);
    made.set_fence(1);
    made.set_reason(reason);
    return made;
  }
  static v1::Receipt receipt(std::int64_t run, std::int64_t event) {
    v1::Receipt made;
    made.set_run(run);
    made.set_fence(1);
    made.set_event(event);
    made.set_chain_hash("h" + std::to_string(event));
    return made;
  }

  process::RealFiles files_;
  std::string folder_;
};

TEST_F(SpoolTest, RaisesItsIncarnationAtEveryStart) {
  EXPECT_EQ(open()->identity().incarnation, 1);
  EXPECT_EQ(open()->identity().incarnation, 2);
  EXPECT_EQ(open()->identity().incarnation, 3);
}

TEST_F(SpoolTest, IsUsedByOneDaemonAtATime) {
  const std::unique_ptr<Spool> first = open();
  const absl::Status status = Spool::open(folder_, files_).status();
  EXPECT_EQ(status.code(), absl::StatusCode::kFailedPrecondition);
  EXPECT_THAT(std::string(status.message()), HasSubstr("in use by another worker"));
}

TEST_F(SpoolTest, RemembersStoreTermAndNewestReceipt) {
  {
    const std::unique_ptr<Spool> spool = open();
    ASSERT_TRUE(spool->adopt("store-a", 4).ok());
    ASSERT_TRUE(spool->write_order(grant(1)).ok());
    ASSERT_TRUE(spool->write_order(grant(2)).ok());
    ASSERT_TRUE(spool->write_receipts({receipt(1, 90), receipt(2, 80)}).ok());
  }
  const Identity identity = open()->identity();
  EXPECT_EQ(identity.store_id, "store-a");
  EXPECT_EQ(identity.term, 4);
  EXPECT_EQ(identity.newest_receipt.event(), 90);
  EXPECT_EQ(identity.newest_receipt.chain_hash(), "h90");
}

TEST_F(SpoolTest, RefusesAnotherStoreAndALowerTerm) {
  const std::unique_ptr<Spool> spool = open();
  ASSERT_TRUE(spool->adopt("store-a", 4).ok());
  EXPECT_TRUE(spool->adopt("store-a", 4).ok());
  EXPECT_TRUE(spool->adopt("store-a", 5).ok());
  EXPECT_EQ(spool->adopt("store-a", 4).code(), absl::StatusCode::kFailedPrecondition);
  EXPECT_EQ(spool->adopt("store-b", 9).code(), absl::StatusCode::kFailedPrecondition);
  EXPECT_EQ(spool->identity().term, 5);
}

TEST_F(SpoolTest, KeepsOrdersAndReports) {
  {
    const std::unique_ptr<Spool> spool = open();
    ASSERT_TRUE(spool->write_order(grant(12)).ok());
    ASSERT_TRUE(spool->write_order(grant(3)).ok());
    ASSERT_TRUE(spool->write_report(report(12, "fell over")).ok());
  }
  const std::unique_ptr<Spool> spool = open();
  const std::vector<SpoolEntry> entries = spool->entries();
  ASSERT_EQ(entries.size(), 2u);
  EXPECT_EQ(entries[0].key, (Key{3, 1}));
  EXPECT_TRUE(entries[0].order && !entries[0].report && !entries[0].receipt);
  EXPECT_EQ(entries[1].key, (Key{12, 1}));
  EXPECT_TRUE(entries[1].order && entries[1].report && !entries[1].receipt);
  EXPECT_EQ(spool->order({12, 1})->study(), "penstock");
  EXPECT_EQ(spool->report({12, 1})->reason(), "fell over");
  EXPECT_TRUE(spool->knows({3, 1}));
  EXPECT_FALSE(spool->knows({3, 2}));
}

TEST_F(SpoolTest, PassesOverWhatIsNotItsOwn) {
  const std::unique_ptr<Spool> spool = open();
  for (const char* name : {"notes", "1", "1.2.3", "01.2", "1.2.tmp", "x.y"}) {
    std::filesystem::create_directory(folder_ + "/attempts/" + name);
  }
  EXPECT_TRUE(spool->entries().empty());
}

TEST_F(SpoolTest, SaysWhichFileIsDamaged) {
  const std::unique_ptr<Spool> spool = open();
  ASSERT_TRUE(spool->write_order(grant(1)).ok());
  std::ofstream(folder_ + "/attempts/1.1/order") << "\xFF\xFF\xFF";
  const absl::Status status = spool->order({1, 1}).status();
  EXPECT_EQ(status.code(), absl::StatusCode::kDataLoss);
  EXPECT_THAT(std::string(status.message()), HasSubstr("attempts/1.1/order"));
}

TEST_F(SpoolTest, RemovesOldDeliveredEntriesAndNoOthers) {
  const std::unique_ptr<Spool> spool = open();
  for (int run = 1; run <= 4; ++run) ASSERT_TRUE(spool->write_order(grant(run)).ok());
  for (int run = 1; run <= 3; ++run) ASSERT_TRUE(spool->write_report(report(run, "x")).ok());
  ASSERT_TRUE(spool->write_receipts({receipt(1, 1), receipt(2, 2)}).ok());
  std::filesystem::last_write_time(folder_ + "/attempts/1.1/receipt",
                                   std::filesystem::file_time_type::clock::now() - std::chrono::hours(24 * 15));
  EXPECT_EQ(spool->prune(Retention{}, absl::Now()), 1);
  EXPECT_FALSE(spool->knows({1, 1}));
  EXPECT_TRUE(spool->knows({2, 1})) << "not old enough";
  EXPECT_EQ(spool->prune(Retention{}, absl::Now() + absl::Hours(24 * 365)), 1);
  EXPECT_TRUE(spool->knows({3, 1})) << "its report was never acknowledged";
  EXPECT_TRUE(spool->knows({4, 1})) << "it may run";
}

TEST_F(SpoolTest, KeepsTheNewestDeliveredEntriesWhenThereAreTooMany) {
  const std::unique_ptr<Spool> spool = open();
  for (int run = 1; run <= 5; ++run) {
    ASSERT_TRUE(spool->write_order(grant(run)).ok());
    ASSERT_TRUE(spool->write_receipts({receipt(run, run)}).ok());
    std::filesystem::last_write_time(folder_ + "/attempts/" + std::to_string(run) + ".1/receipt",
                                     std::filesystem::file_time_type::clock::now() - std::chrono::minutes(10 - run));
  }
  EXPECT_EQ(spool->prune(Retention{.most = 2}, absl::Now()), 3);
  EXPECT_FALSE(spool->knows({3, 1}));
  EXPECT_TRUE(spool->knows({4, 1}) && spool->knows({5, 1}));
}

}  // namespace
}  // namespace drover::session
