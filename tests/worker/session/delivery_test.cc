// Results find their way, whatever becomes of calls, sessions and the disk.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <set>
#include <vector>

#include "google/protobuf/util/message_differencer.h"
#include "worker/session/workshop.h"

namespace drover::session {
namespace {

bool reported(const FakeCoordinator& coordinator, std::size_t many) { return coordinator.reports().size() >= many; }

// Lets a number of durable writes of reports or orders fail, as a full disk does.
class FullDisk final : public process::Files {
 public:
  void refuse(const std::string& name, int many) {
    const std::lock_guard lock(mutex_);
    name_ = "/" + name;
    left_ = many;
  }
  int refused() const {
    const std::lock_guard lock(mutex_);
    return refused_;
  }

  absl::Status write_durably(const std::string& path, std::string_view bytes) override {
    {
      const std::lock_guard lock(mutex_);
      const bool meant = path.size() > name_.size() && path.ends_with(name_);
      if (meant && left_ > 0) {
        --left_;
        ++refused_;
        return absl::ResourceExhaustedError(path + ": No space left on device");
      }
    }
    return under_.write_durably(path, bytes);
  }
  absl::StatusOr<std::string> read(const std::string& path) const override { return under_.read(path); }
  absl::StatusOr<std::vector<std::string>> list(const std::string& folder) const override {
    return under_.list(folder);
  }
  absl::Status make_folder(const std::string& path) override { return under_.make_folder(path); }
  absl::Status remove_tree(const std::string& path) override { return under_.remove_tree(path); }
  bool exists(const std::string& path) const override { return under_.exists(path); }
  absl::StatusOr<std::int64_t> free_bytes(const std::string& folder) const override {
    return under_.free_bytes(folder);
  }

 private:
  process::RealFiles under_;
  mutable std::mutex mutex_;
  std::string name_ = "/";
  int left_ = 0, refused_ = 0;
};

TEST(Delivery, HasEveryReportOnDiskBeforeItIsSent) {
  Workshop shop;
  shop.add_usual_codes();
  std::mutex mutex;
  int looked = 0, missing = 0;
  shop.coordinator.at_report([&](const v1::ReportRequest& request) {
    const std::lock_guard lock(mutex);
    for (const v1::AttemptReport& report : request.reports()) {
      ++looked;
      const absl::StatusOr<std::string> bytes =
          shop.files.read(shop.attempt_file({report.run(), report.fence()}, "report"));
      v1::AttemptReport kept;
      const bool same = bytes.ok() && kept.ParseFromString(*bytes) &&
                        google::protobuf::util::MessageDifferencer::Equals(kept, report);
      if (!same) ++missing;
    }
  });
  for (int run = 1; run <= 4; ++run) shop.coordinator.grant(shop.grant(run, run % 2 == 0 ? "quick" : "broken"));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 4); }));
  ASSERT_TRUE(shop.stop().ok());
  EXPECT_GE(looked, 4);
  EXPECT_EQ(missing, 0);
}

TEST(Delivery, WaitsInTheSpoolWhileTheCoordinatorIsAway) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated", 21));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  shop.coordinator.go_away();
  shop.open_gate();
  ASSERT_TRUE(eventually([&] { return shop.has_report({1, 1}); }));
  const std::string kept = shop.files.read(shop.attempt_file({1, 1}, "report")).value();
  const std::size_t tried = shop.coordinator.report_calls().size();
  ASSERT_TRUE(shop.coordinator.eventually([&](const auto& c) { return c.report_calls().size() >= tried + 3; }));
  EXPECT_TRUE(shop.coordinator.reports().empty());
  EXPECT_TRUE(shop.files.exists(shop.base + "/scratch/1.1/case.out")) << "nothing is cleared away before the receipt";
  shop.coordinator.come_back();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  const v1::AttemptReport report = shop.coordinator.reports().at({1, 1});
  EXPECT_EQ(report.outputs(0).value(), 42);
  EXPECT_EQ(report.SerializeAsString(), kept);
  EXPECT_TRUE(eventually([&] { return shop.files.exists(shop.attempt_file({1, 1}, "receipt")); }));
}

TEST(Delivery, RepeatsAnUnansweredCallWithTheSameRequestId) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.lose_answers_of_lease(1);
  shop.coordinator.lose_answers_of_report(1);
  shop.coordinator.grant(shop.grant(1, "quick"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.files.exists(shop.attempt_file({1, 1}, "receipt")); }));
  const std::vector<v1::LeaseRequest> leases = shop.coordinator.leases();
  ASSERT_GE(leases.size(), 2u);
  EXPECT_EQ(leases[0].SerializeAsString(), leases[1].SerializeAsString());
  const std::vector<v1::ReportRequest> calls = shop.coordinator.report_calls();
  ASSERT_GE(calls.size(), 2u);
  EXPECT_EQ(calls[0].SerializeAsString(), calls[1].SerializeAsString());
  EXPECT_EQ(shop.coordinator.times_reported().at({1, 1}), 1) << "the second call was answered from memory";
  EXPECT_EQ(shop.begun(), 1);
  std::set<std::string> ids;
  for (const v1::ReportRequest& call : calls) ids.insert(call.request_id());
  for (const v1::LeaseRequest& call : leases) ids.insert(call.request_id());
  EXPECT_GE(ids.size(), 2u) << "but each new request has an id of its own";
}

TEST(Delivery, EnrolsAgainWithItsWholeRollWhenTheSessionIsLost) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  shop.coordinator.lose_sessions();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return c.enrolments().size() >= 2; }));
  const v1::EnrolRequest again = shop.coordinator.enrolments()[1];
  ASSERT_EQ(again.roll_call_size(), 1);
  EXPECT_EQ(again.roll_call(0).run(), 1);
  EXPECT_EQ(again.roll_call(0).state(), v1::ROLL_STATE_RUNNING);
  EXPECT_EQ(again.incarnation(), 1) << "the same life of the daemon";
  EXPECT_EQ(again.store_id(), "store-1");
  shop.open_gate();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_EQ(shop.begun(), 1);
}

TEST(Delivery, PresentsItsNewestReceipt) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "quick"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.files.exists(shop.attempt_file({1, 1}, "receipt")); }));
  ASSERT_TRUE(shop.stop().ok());
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return c.enrolments().size() >= 2; }));
  const v1::EnrolRequest again = shop.coordinator.enrolments()[1];
  EXPECT_EQ(again.newest_receipt().run(), 1);
  EXPECT_EQ(again.newest_receipt().event(), 1);
  EXPECT_EQ(again.incarnation(), 2);
  EXPECT_EQ(again.roll_call_size(), 0) << "what was delivered is not called";
}

TEST(Delivery, LetsAMalformedReportHoldUpNoOther) {
  Workshop shop;
  shop.add_usual_codes();
  Options options = shop.options();
  options.slots = 4;
  for (int run = 1; run <= 4; ++run) shop.coordinator.grant(shop.grant(run, "gated"));
  shop.coordinator.refuse_reports_of(2);
  shop.start(options);
  ASSERT_TRUE(eventually([&] { return shop.begun() == 4; }));
  shop.coordinator.go_away();  // so that all four wait for one call
  shop.open_gate();
  for (int run = 1; run <= 4; ++run) ASSERT_TRUE(eventually([&] { return shop.has_report({run, 1}); }));
  shop.coordinator.come_back();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 3); }));
  EXPECT_FALSE(shop.coordinator.reports().contains({2, 1}));
  EXPECT_TRUE(shop.has_report({2, 1})) << "kept for the operator";
}

TEST(Delivery, KeepsTryingToWriteAReportWhenTheDiskIsFull) {
  FullDisk disk;
  Workshop shop;
  shop.add_usual_codes();
  disk.refuse("report", 3);
  shop.coordinator.grant(shop.grant(1, "quick", 4));
  shop.start(shop.options(), disk);
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_EQ(disk.refused(), 3);
  EXPECT_EQ(shop.coordinator.reports().at({1, 1}).outputs(0).value(), 8);
  EXPECT_EQ(shop.coordinator.times_reported().at({1, 1}), 1);
  ASSERT_TRUE(shop.stop().ok());
}

TEST(Delivery, GivesAGrantBackThatCouldNotBeWrittenDown) {
  FullDisk disk;
  Workshop shop;
  shop.add_usual_codes();
  disk.refuse("order", 1);
  shop.coordinator.grant(shop.grant(1, "quick"));
  shop.start(shop.options(), disk);
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return c.enrolments().size() >= 2; }));
  EXPECT_EQ(shop.coordinator.enrolments()[1].roll_call_size(), 0) << "by a roll call without it";
  EXPECT_EQ(shop.begun(), 0);
  shop.coordinator.grant(shop.grant(1, "quick", 4, 2));
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_TRUE(shop.coordinator.reports().contains({1, 2}));
  ASSERT_TRUE(shop.stop().ok());
}

TEST(Delivery, SendsAgainWhatItsReceiptCouldNotBeWrittenFor) {
  FullDisk disk;
  Workshop shop;
  shop.add_usual_codes();
  disk.refuse("receipt", 2);
  shop.coordinator.grant(shop.grant(1, "quick", 4));
  shop.start(shop.options(), disk);
  ASSERT_TRUE(eventually([&] { return shop.files.exists(shop.attempt_file({1, 1}, "receipt")); }));
  EXPECT_EQ(shop.coordinator.times_reported().at({1, 1}), 3);
  EXPECT_EQ(shop.coordinator.reports().at({1, 1}).outputs(0).value(), 8);
  ASSERT_TRUE(shop.stop().ok());
}

TEST(Delivery, TakesNoMoreRunsWhenTooManyReportsWait) {
  Workshop shop;
  shop.add_usual_codes();
  Options options = shop.options();
  options.most_waiting = 1;
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.start(options);
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  shop.coordinator.go_away();
  shop.open_gate();
  ASSERT_TRUE(eventually([&] { return shop.has_report({1, 1}); }));
  shop.coordinator.come_back();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  // The call that delivered it was filled while it waited, and so asked for no further run.
  EXPECT_EQ(shop.coordinator.report_calls().back().want(), 0);
}

}  // namespace
}  // namespace drover::session
