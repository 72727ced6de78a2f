#include "session/daemon.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "worker/session/workshop.h"

namespace drover::session {
namespace {

using ::testing::HasSubstr;

bool reported(const FakeCoordinator& coordinator, std::size_t many) { return coordinator.reports().size() >= many; }

TEST(Daemon, RunsWhatItIsGrantedAndReportsIt) {
  Workshop shop;
  shop.add_usual_codes();
  for (int run = 1; run <= 5; ++run) shop.coordinator.grant(shop.grant(run, "quick", 10 + run));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 5); }));
  for (int run = 1; run <= 5; ++run) {
    const v1::AttemptReport report = shop.coordinator.reports().at({run, 1});
    EXPECT_EQ(report.ending(), v1::ENDING_EVALUATED) << report.reason();
    ASSERT_EQ(report.outputs_size(), 1);
    EXPECT_EQ(report.outputs(0).name(), "y");
    EXPECT_EQ(report.outputs(0).value(), 2 * (10 + run));
    EXPECT_EQ(report.input_digest(), "inputs-of-" + std::to_string(run));
    EXPECT_EQ(report.usage().exit_code(), 0);
  }
  EXPECT_TRUE(eventually([&] { return shop.files.list(shop.base + "/scratch")->empty(); })) << "after the receipts";
  EXPECT_EQ(shop.begun(), 5);
}

TEST(Daemon, SaysWhoItIsWhenItEnrols) {
  Workshop shop;
  shop.add_usual_codes();
  Options options = shop.options();
  options.tags = {"big"};
  shop.start(options);
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return !c.enrolments().empty(); }));
  const v1::EnrolRequest request = shop.coordinator.enrolments().front();
  EXPECT_EQ(request.worker(), "bench");
  EXPECT_EQ(request.slots(), 2);
  EXPECT_EQ(request.incarnation(), 1);
  EXPECT_EQ(request.boot_id(), shop.options().machine.boot_id);
  EXPECT_FALSE(request.boot_id().empty());
  EXPECT_GE(request.cores(), 1);
  EXPECT_GT(request.memory_bytes(), 0);
  ASSERT_EQ(request.codes_size(), 3);
  EXPECT_EQ(request.codes(2).digest(), "digest-of-quick");
  EXPECT_EQ(request.tags(0), "big");
  EXPECT_TRUE(request.roll_call_complete());
  EXPECT_EQ(request.roll_call_size(), 0);
}

TEST(Daemon, NeverRunsMoreThanItHasSlots) {
  Workshop shop;
  shop.add_usual_codes();
  for (int run = 1; run <= 6; ++run) shop.coordinator.grant(shop.grant(run, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.begun() == 2; }));
  // Some renewals later it is still so.
  const std::size_t before = shop.coordinator.renewals().size();
  ASSERT_TRUE(shop.coordinator.eventually([&](const auto& c) { return c.renewals().size() > before + 5; }));
  EXPECT_EQ(shop.begun(), 2);
  EXPECT_EQ(shop.coordinator.renewals().back().attempts_size(), 2);
  shop.open_gate();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 6); }));
  for (const v1::LeaseRequest& request : shop.coordinator.leases()) EXPECT_LE(request.want(), 2);
}

TEST(Daemon, TakesTheNextRunInTheAnswerToAReport) {
  Workshop shop;
  shop.add_usual_codes();
  Options options = shop.options();
  options.slots = 1;
  for (int run = 1; run <= 4; ++run) shop.coordinator.grant(shop.grant(run, "quick"));
  shop.start(options);
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 4); }));
  int wanted = 0;
  for (const v1::ReportRequest& request : shop.coordinator.report_calls()) wanted += request.want();
  EXPECT_GE(wanted, 3);
}

TEST(Daemon, SaysInItsRenewalsWhatItsAttemptsDo) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(7, "gated"));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) {
    const auto renewals = c.renewals();
    return !renewals.empty() && renewals.back().attempts_size() == 1 &&
           renewals.back().attempts(0).state() == v1::ROLL_STATE_RUNNING;
  }));
  EXPECT_EQ(shop.coordinator.renewals().back().attempts(0).run(), 7);
  EXPECT_TRUE(shop.coordinator.renewals().back().attempts(0).has_elapsed());
}

TEST(Daemon, ReportsThatTheCodeFailed) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "broken"));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  const v1::AttemptReport report = shop.coordinator.reports().at({1, 1});
  EXPECT_EQ(report.ending(), v1::ENDING_FAILED);
  EXPECT_EQ(report.failure(), v1::FAILURE_KIND_CODE);
  EXPECT_EQ(report.usage().exit_code(), 3);
  EXPECT_THAT(report.stderr_tail(), HasSubstr("it broke"));
}

TEST(Daemon, ReportsATimeLimitAsAFailure) {
  Workshop shop;
  shop.add_usual_codes();
  v1::Grant grant = shop.grant(1, "gated");
  grant.mutable_time_limit()->set_nanos(200'000'000);
  shop.coordinator.grant(grant);
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  const v1::AttemptReport report = shop.coordinator.reports().at({1, 1});
  EXPECT_EQ(report.ending(), v1::ENDING_FAILED) << report.reason();
  EXPECT_EQ(report.failure(), v1::FAILURE_KIND_LIMIT);
}

TEST(Daemon, TakesTheDefinitionsTimeLimitWhereTheGrantHasNone) {
  Workshop shop;
  shop.add_code("short", "sleep 60").time_limit = absl::Milliseconds(200);
  shop.coordinator.grant(shop.grant(1, "short"));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_EQ(shop.coordinator.reports().at({1, 1}).failure(), v1::FAILURE_KIND_LIMIT);
}

TEST(Daemon, ReportsAMissingProgramAsLostToTheSite) {
  Workshop shop;
  shop.add_usual_codes();
  shop.catalogue.codes.back().command = {shop.base + "/nowhere"};  // quick
  shop.coordinator.grant(shop.grant(1, "quick"));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  const v1::AttemptReport report = shop.coordinator.reports().at({1, 1});
  EXPECT_EQ(report.ending(), v1::ENDING_LOST) << report.reason();
  EXPECT_EQ(report.loss(), v1::LOSS_REASON_SITE);
  EXPECT_FALSE(report.reason().empty());
}

TEST(Daemon, ReportsAMissingRunnerAsLostToTheSite) {
  Workshop shop;
  shop.add_usual_codes();
  Options options = shop.options();
  options.runner = shop.base + "/nowhere";
  shop.coordinator.grant(shop.grant(1, "quick"));
  shop.start(options);
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_EQ(shop.coordinator.reports().at({1, 1}).loss(), v1::LOSS_REASON_SITE);
}

TEST(Daemon, NeverRunsAnotherDefinitionThanTheOneThatWasGranted) {
  Workshop shop;
  shop.add_usual_codes();
  v1::Grant changed = shop.grant(1, "quick");
  changed.set_code_digest("older");
  shop.coordinator.grant(changed);
  shop.coordinator.grant(shop.grant(2, "unheard-of"));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 2); }));
  for (const auto& [key, report] : shop.coordinator.reports()) {
    EXPECT_EQ(report.ending(), v1::ENDING_LOST);
    EXPECT_EQ(report.loss(), v1::LOSS_REASON_SITE);
  }
  EXPECT_THAT(shop.coordinator.reports().at({1, 1}).reason(), HasSubstr("older"));
  EXPECT_THAT(shop.coordinator.reports().at({2, 1}).reason(), HasSubstr("unheard-of"));
  EXPECT_EQ(shop.begun(), 0);
}

TEST(Daemon, EndsARunThatItIsToldToStop) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  shop.coordinator.order_stop({1, 1});
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  const v1::AttemptReport report = shop.coordinator.reports().at({1, 1});
  EXPECT_EQ(report.ending(), v1::ENDING_STOPPED) << report.reason();
  EXPECT_THAT(report.reason(), HasSubstr("the study was stopped"));
  EXPECT_FALSE(shop.running({1, 1}));
}

TEST(Daemon, RunsAGrantThatComesTwiceOnce) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant_twice(shop.grant(1, "quick"));
  shop.coordinator.grant(shop.grant(2, "quick"));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 2); }));
  shop.coordinator.grant(shop.grant(1, "quick"));  // long delivered
  shop.coordinator.grant(shop.grant(3, "quick"));
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 3); }));
  EXPECT_EQ(shop.begun(), 3);
}

TEST(Daemon, RefusesGrantsOfALowerTermOrAnotherStore) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.speak_in("store-1", 5);
  v1::Grant old = shop.grant(1, "quick"), strange = shop.grant(2, "quick");
  old.set_term(4);
  strange.set_store_id("store-2");
  shop.coordinator.grant(old);
  shop.coordinator.grant(strange);
  shop.coordinator.grant(shop.grant(3, "quick"));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_TRUE(shop.coordinator.reports().contains({3, 1}));
  EXPECT_EQ(shop.begun(), 1);
  EXPECT_FALSE(shop.files.exists(shop.attempt_file({1, 1}, "order")));
}

TEST(Daemon, ServesNoCoordinatorOfALowerTerm) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.speak_in("store-1", 5);
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return !c.leases().empty(); }));
  ASSERT_TRUE(shop.stop().ok());
  shop.coordinator.speak_in("store-1", 4);
  absl::StatusOr<std::unique_ptr<Daemon>> next =
      Daemon::open(shop.options(), shop.catalogue, shop.coordinator, shop.files, shop.clock);
  ASSERT_TRUE(next.ok());
  const absl::Status status = (*next)->run();
  EXPECT_EQ(status.code(), absl::StatusCode::kFailedPrecondition);
  EXPECT_THAT(std::string(status.message()), HasSubstr("term 5"));
}

TEST(Daemon, TakesNoMoreRunsWhileItIsDrained) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  shop.coordinator.drain(true);
  const std::size_t before = shop.coordinator.renewals().size();
  ASSERT_TRUE(shop.coordinator.eventually([&](const auto& c) { return c.renewals().size() > before + 1; }));
  shop.open_gate();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_EQ(shop.coordinator.report_calls().back().want(), 0);
}

TEST(Daemon, EndsWhenItsFirstEnrolmentIsRefused) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.refuse_enrolments(absl::FailedPreconditionError("a worker named bench is enrolled from elsewhere"));
  absl::StatusOr<std::unique_ptr<Daemon>> daemon =
      Daemon::open(shop.options(), shop.catalogue, shop.coordinator, shop.files, shop.clock);
  ASSERT_TRUE(daemon.ok());
  const absl::Status status = (*daemon)->run();
  EXPECT_EQ(status.code(), absl::StatusCode::kFailedPrecondition);
  EXPECT_THAT(std::string(status.message()), HasSubstr("enrolled from elsewhere"));
}

TEST(Daemon, CanBeStoppedWhileItStillLooksForItsCoordinator) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.go_away();
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return c.enrolments().size() >= 3; }));
  EXPECT_TRUE(shop.stop().ok());
  EXPECT_EQ(shop.coordinator.enrolments()[0].request_id(), shop.coordinator.enrolments()[2].request_id());
}

TEST(Stop, EndsWhatRunsAndReportsItLostToTheEndOfTheWorker) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.coordinator.grant(shop.grant(2, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}) && shop.running({2, 1}); }));
  EXPECT_TRUE(shop.stop().ok());
  for (const Key& key : {Key{1, 1}, Key{2, 1}}) {
    EXPECT_FALSE(shop.running(key));
    ASSERT_TRUE(shop.coordinator.reports().contains(key));
    EXPECT_EQ(shop.coordinator.reports().at(key).ending(), v1::ENDING_LOST);
    EXPECT_EQ(shop.coordinator.reports().at(key).loss(), v1::LOSS_REASON_DAEMON_RESTART);
  }
}

TEST(Stop, LeavesInTheSpoolWhatTheCoordinatorDoesNotTake) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant(shop.grant(1, "gated"));
  shop.start();
  ASSERT_TRUE(eventually([&] { return shop.running({1, 1}); }));
  shop.coordinator.go_away();
  EXPECT_TRUE(shop.stop().ok());
  EXPECT_TRUE(shop.coordinator.reports().empty());
  EXPECT_TRUE(shop.has_report({1, 1}));
  shop.coordinator.come_back();
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return reported(c, 1); }));
  EXPECT_EQ(shop.coordinator.reports().at({1, 1}).loss(), v1::LOSS_REASON_DAEMON_RESTART);
}

TEST(Stop, HandsBackWhatAPollWasGrantedAtThatMoment) {
  Workshop shop;
  shop.add_usual_codes();
  shop.coordinator.grant_as_a_poll_is_ended(shop.grant(1, "gated"));
  shop.start();
  ASSERT_TRUE(shop.coordinator.eventually([](const auto& c) { return !c.leases().empty(); }));
  EXPECT_TRUE(shop.stop().ok());
  ASSERT_TRUE(shop.coordinator.reports().contains({1, 1}));
  EXPECT_EQ(shop.coordinator.reports().at({1, 1}).ending(), v1::ENDING_NOT_BEGUN);
  EXPECT_EQ(shop.begun(), 0);
  const std::vector<v1::LeaseRequest> asked = shop.coordinator.leases();
  ASSERT_GE(asked.size(), 2u);
  EXPECT_EQ(asked.back().request_id(), asked[asked.size() - 2].request_id());
  EXPECT_EQ(asked.back().wait().seconds(), 0);
}

}  // namespace
}  // namespace drover::session
