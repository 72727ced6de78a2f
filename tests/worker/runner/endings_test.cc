// How a runner ends a program and all that it started.
#include <gtest/gtest.h>
#include <signal.h>

#include <fstream>
#include <string>

#include "worker/process/attempt.h"

namespace drover::process {
namespace {

// Who wrote its number into the file `daemon`.
pid_t daemon_of(const TestAttempt& attempt) {
  std::ifstream file(attempt.work() + "/daemon");
  pid_t daemon = 0;
  file >> daemon;
  EXPECT_GT(daemon, 0);
  return daemon;
}

TEST(Runner, EndsAtItsTimeLimitWhatIgnoresSigterm) {
  TestAttempt attempt;
  Launch launch = attempt.options("trap '' TERM; while :; do sleep 1; done");
  launch.time_limit = absl::Milliseconds(300);
  attempt.start(launch);
  const Ended ended = attempt.wait();
  EXPECT_EQ(ended.cause, Ended::Cause::kLimit);
  EXPECT_EQ(ended.signal, SIGKILL);
  EXPECT_TRUE(ended.killed_by_us);
  EXPECT_GE(ended.wall, absl::Milliseconds(600)) << "limit and grace";
}

TEST(Runner, LetsAProgramEndItselfAtSigterm) {
  TestAttempt attempt;
  Launch launch = attempt.options("trap 'echo saved; exit 5' TERM; while :; do sleep 0.05; done");
  launch.time_limit = absl::Milliseconds(300);
  launch.grace = absl::Seconds(10);
  attempt.start(launch);
  const Ended ended = attempt.wait();
  EXPECT_EQ(ended.cause, Ended::Cause::kLimit);
  EXPECT_EQ(ended.exit_code, 5);
  EXPECT_EQ(attempt.read(kStdoutFile), "saved\n");
}

TEST(Runner, StopsWhenItIsAskedTo) {
  TestAttempt attempt;
  attempt.start("sleep 60");
  ASSERT_TRUE(attempt.wait_for(attempt.folder() + "/begun"));
  std::ofstream(attempt.folder() + "/stop");
  EXPECT_EQ(attempt.wait().cause, Ended::Cause::kStopped);
}

TEST(Runner, EndsAtItsTimeLimitWhatLeftItsSession) {
  TestAttempt attempt;
  Launch launch = attempt.options("setsid sh -c 'echo $$ > daemon; exec sleep 60' & wait");
  launch.time_limit = absl::Milliseconds(500);
  attempt.start(launch);
  EXPECT_EQ(attempt.wait().cause, Ended::Cause::kLimit);
  EXPECT_FALSE(stat_of(daemon_of(attempt)).has_value());
}

TEST(Runner, IsNotEndedByASignalToWhoeverStartedIt) {
  TestAttempt attempt;
  attempt.start("touch up; while [ ! -e go ]; do sleep 0.02; done; exit 6");
  ASSERT_TRUE(attempt.wait_for(attempt.work() + "/up"));
  for (const int signal : {SIGTERM, SIGHUP, SIGINT}) kill(attempt.runner(), signal);
  std::ofstream(attempt.work() + "/go");
  EXPECT_EQ(attempt.wait().exit_code, 6);
}

// The program came to its own end, so that is what is recorded; only what it left is ended sooner.
TEST(Runner, EndsWhatIsLeftAtOnceWhenAskedToStop) {
  TestAttempt attempt;
  Launch launch = attempt.options("setsid sleep 60 & exit 0");
  launch.grace = absl::Seconds(15);
  attempt.start(launch);
  ASSERT_TRUE(attempt.wait_for(attempt.folder() + "/begun"));
  const pid_t child = parse_begun(attempt.read(kBegunFile))->child.pid;
  ASSERT_TRUE(eventually([&] { return !stat_of(child).has_value(); }));
  std::ofstream(attempt.folder() + "/stop");
  const Ended ended = attempt.wait();
  EXPECT_EQ(ended.cause, Ended::Cause::kExited);
  EXPECT_EQ(ended.exit_code, 0);
  EXPECT_LT(ended.wall, absl::Seconds(15)) << "the grace is not waited for";
}

TEST(Runner, EndsWhatAProgramLeavesBehindInASessionOfItsOwn) {
  TestAttempt attempt;
  attempt.start(
      "setsid sh -c 'echo $$ > daemon; trap \"\" TERM; sleep 60' & while [ ! -s daemon ]; do sleep 0.02; done; exit 0");
  const Ended ended = attempt.wait();
  EXPECT_EQ(ended.exit_code, 0);
  EXPECT_FALSE(stat_of(daemon_of(attempt)).has_value());
}

}  // namespace
}  // namespace drover::process
