// What a daemon makes of the spool that an earlier one left.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <csignal>

#include "process/attempt_folder.h"
#include "worker/session/workshop.h"

namespace drover::session {
namespace {

using ::testing::HasSubstr;

bool reported(const FakeCoordinator& coordinator, std::size_t many) { return coordinator.reports().size() >= many; }

process::Begun begun_of(Workshop& shop, const Key& key) {
  return process::parse_begun(shop.files.read(shop.attempt_file(key, process::kBegunFile)).value()).value();
}

TEST(Recovery, EndsWhatTheEarlierDaemonLeftRunning) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.coordinator.grant(shop.grant(2, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}) && shop.running({2, 1}); }));
  shop.drop();
  EXPECT_TRUE(shop.running({1, 1})) << "a crash of the daemon ends no simulation";
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 2); }));
  for (const Key& key : {Key{1, 1}, Key{2, 1}}) {
    EXPECT_FALSE(shop.running(key));
    EXPECT_EQ(shop.coordinator.reports().at(key).ending(), v1::ENDING_LOST);
    EXPECT_EQ(shop.coordinator.reports().at(key).loss(), v1::LOSS_REASON_DAEMON_RESTART);
  }
  const v1::EnrolRequest second = shop.coordinator.enrolments().back();
  EXPECT_EQ(second.incarnation(), 2);
  ASSERT_EQ(second.roll_call_size(), 2);
  EXPECT_EQ(second.roll_call(0).state(), v1::ROLL_STATE_ENDED) << "a report waits, so the coordinator asks for it";
}

TEST(Recovery, KeepsTheResultOfARunThatEndedWhileNoDaemonWasThere) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated", 21));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  shop.drop();
  shop.open_gate();
  ASSERT_TRUE(eventually([&] { return shop.files.exists(shop.attempt_file({1, 1}, process::kEndedFile)); }));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  const v1::AttemptReport report = shop.coordinator.reports().at({1, 1});
  EXPECT_EQ(report.ending(), v1::ENDING_EVALUATED) << report.reason();
  EXPECT_EQ(report.outputs(0).value(), 42);
  EXPECT_EQ(shop.begun(), 1) << "an hour of computing is not done twice";
}

TEST(Recovery, HandsBackWhatWasOnlyOrdered) {
  Workshop shop;
  shop.add_usual_codes();
  {
    const std::unique_ptr<Spool> spool = Spool::open(shop.base + "/spool", shop.files).value();
    ASSERT_TRUE(spool->write_order(shop.grant(1, "quick")).ok());
  }
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_EQ(shop.coordinator.reports().at({1, 1}).ending(), v1::ENDING_NOT_BEGUN);
  EXPECT_EQ(shop.begun(), 0);
}

TEST(Recovery, SaysThatNobodySawTheEndWhereNobodyDid) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  const process::Begun begun = begun_of(shop, {1, 1});
  shop.drop();
  kill(begun.runner.pid, SIGKILL);
  kill(-begun.child.pid, SIGKILL);
  kill(begun.child.pid, SIGKILL);
  ASSERT_TRUE(eventually([&] { return shop.processes() == 0; }));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  const v1::AttemptReport report = shop.coordinator.reports().at({1, 1});
  EXPECT_EQ(report.ending(), v1::ENDING_LOST);
  EXPECT_EQ(report.loss(), v1::LOSS_REASON_EXIT_UNKNOWN) << report.reason();
}

TEST(Recovery, EndsASimulationWhoseRunnerIsGone) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  const process::Begun begun = begun_of(shop, {1, 1});
  shop.drop();
  kill(begun.runner.pid, SIGKILL);
  ASSERT_TRUE(eventually([&] { return !process::is_alive(begun.runner); }));
  EXPECT_TRUE(shop.running({1, 1}));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_FALSE(shop.running({1, 1}));
  EXPECT_EQ(shop.coordinator.reports().at({1, 1}).loss(), v1::LOSS_REASON_DAEMON_RESTART);
}

TEST(Recovery, KnowsARebootByItsBootId) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  const process::Begun begun = begun_of(shop, {1, 1});
  shop.drop();
  kill(begun.runner.pid, SIGKILL);
  kill(-begun.child.pid, SIGKILL);
  kill(begun.child.pid, SIGKILL);
  ASSERT_TRUE(eventually([&] { return shop.processes() == 0; }));
  Options options = shop.options();
  options.machine.boot_id = "11111111-2222-3333-4444-555555555555";
  shop.start(options);
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_EQ(shop.coordinator.reports().at({1, 1}).loss(), v1::LOSS_REASON_REBOOT);
}

TEST(Recovery, DeliversAReportThatHadNoReceipt) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated", 3));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  shop.coordinator.go_away();
  shop.open_gate();
  ASSERT_TRUE(eventually([&] { return shop.has_report({1, 1}); }));
  shop.drop();
  const std::string kept = shop.files.read(shop.attempt_file({1, 1}, "report")).value();
  shop.coordinator.come_back();
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_EQ(shop.coordinator.reports().at({1, 1}).SerializeAsString(), kept);
  EXPECT_TRUE(eventually([&] { return shop.files.list(shop.base + "/scratch")->empty(); }));
}

TEST(Recovery, DoesNotReadAResultWithAnotherDefinition) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  shop.drop();
  shop.open_gate();
  ASSERT_TRUE(eventually([&] { return shop.files.exists(shop.attempt_file({1, 1}, process::kEndedFile)); }));
  for (code::Definition& definition : shop.catalogue.codes) definition.digest += "-changed";
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  const v1::AttemptReport report = shop.coordinator.reports().at({1, 1});
  EXPECT_EQ(report.ending(), v1::ENDING_LOST);
  EXPECT_EQ(report.loss(), v1::LOSS_REASON_SITE);
  EXPECT_THAT(report.reason(), HasSubstr("cannot be read any more"));
}

TEST(Recovery, RefusesASecondDaemonOnTheSpool) {
  Workshop shop;
  shop.add_usual_codes();
  shop.start();
  const absl::Status status =
      Daemon::open(shop.options(), shop.catalogue, shop.coordinator, shop.files, shop.clock).status();
  EXPECT_EQ(status.code(), absl::StatusCode::kFailedPrecondition);
}

}  // namespace
}  // namespace drover::session
