// What a daemon finds of attempts that it did not see end, and how it ends them.
#include "process/launch.h"

#include <gtest/gtest.h>
#include <signal.h>
#include <sys/wait.h>
#include <unistd.h>

#include <atomic>
#include <fstream>
#include <memory>
#include <vector>

#include "process/leftovers.h"
#include "process/watcher.h"
#include "worker/process/attempt.h"

namespace drover::process {
namespace {

TEST(Survey, TellsTheStatesOfAnAttemptApart) {
  TestAttempt attempt;
  EXPECT_EQ(attempt.found(), Found::kOrdered);
  attempt.start("touch up; while [ ! -e go ]; do sleep 0.02; done");
  ASSERT_TRUE(attempt.wait_for(attempt.folder() + "/begun"));
  EXPECT_EQ(attempt.found(), Found::kRunning);
  std::ofstream(attempt.work() + "/go");
  attempt.wait();
  EXPECT_EQ(attempt.found(), Found::kEnded);
  std::ofstream(attempt.folder() + "/report") << "r";
  EXPECT_EQ(attempt.found(), Found::kReported);
  std::ofstream(attempt.folder() + "/receipt") << "r";
  EXPECT_EQ(attempt.found(), Found::kDelivered);
}

TEST(Survey, SeesASimulationWhoseRunnerWasKilledAndThenThatNobodySawItsEnd) {
  TestAttempt attempt;
  attempt.start("touch up; while [ ! -e go ]; do sleep 0.02; done");
  ASSERT_TRUE(attempt.wait_for(attempt.work() + "/up"));
  kill(attempt.runner(), SIGKILL);
  EXPECT_TRUE(eventually([&] { return attempt.found() == Found::kUnwatched; }));
  std::ofstream(attempt.work() + "/go");
  EXPECT_TRUE(eventually([&] { return attempt.found() == Found::kUnknown; })) << "an end that nobody saw";
}

TEST(Survey, TellsARebootFromARestart) {
  TestAttempt attempt;
  attempt.start("exit 0");
  attempt.wait();
  unlink((attempt.folder() + "/ended").c_str());
  const auto seen = survey(RealFiles(), attempt.folder(), "another boot");
  ASSERT_TRUE(seen.ok());
  EXPECT_EQ(seen->found, Found::kRebooted);
}

TEST(Leftovers, AreEndedThroughTheirRunnerWhichRecordsTheEnd) {
  TestAttempt attempt;
  attempt.start("sleep 60");
  ASSERT_TRUE(attempt.wait_for(attempt.folder() + "/begun"));
  RealFiles files;
  ASSERT_TRUE(end_leftovers(files, attempt.folder(), boot_id(), absl::Milliseconds(300)).ok());
  EXPECT_EQ(attempt.wait().cause, Ended::Cause::kStopped);
}

TEST(Leftovers, OfAKilledRunnerAreEndedByTheirIdentity) {
  TestAttempt attempt;
  attempt.start("trap '' TERM; setsid sleep 60 & touch up; while :; do sleep 1; done");
  ASSERT_TRUE(attempt.wait_for(attempt.work() + "/up"));
  kill(attempt.runner(), SIGKILL);
  ASSERT_TRUE(eventually([&] { return attempt.found() == Found::kUnwatched; }));
  RealFiles files;
  ASSERT_TRUE(end_leftovers(files, attempt.folder(), boot_id(), absl::Milliseconds(300)).ok());
  EXPECT_EQ(attempt.found(), Found::kUnknown);
}

TEST(Leftovers, OfNothingAreNothing) {
  TestAttempt attempt;
  RealFiles files;
  EXPECT_TRUE(end_leftovers(files, attempt.folder(), boot_id(), absl::Milliseconds(300)).ok());
}

TEST(Launch, OutlivesWhoLaunchedIt) {
  TestAttempt attempt;
  const pid_t daemon = fork();
  if (daemon == 0) _exit(launch(attempt.options("sleep 0.3; exit 4")).ok() ? 0 : 1);
  int status = 0;
  waitpid(daemon, &status, 0);
  ASSERT_EQ(WEXITSTATUS(status), 0);
  ASSERT_TRUE(attempt.wait_for(attempt.folder() + "/ended"));
  EXPECT_EQ(parse_ended(attempt.read(kEndedFile))->exit_code, 4);
}

TEST(Launch, SaysWhenThereIsNoRunner) {
  TestAttempt attempt;
  Launch launch = attempt.options("exit 0");
  launch.runner = "/nowhere/drover-runner";
  EXPECT_TRUE(absl::IsUnavailable(process::launch(launch).status()));
}

// Also while other processes are being started: a child that has not reached its exec holds copies of our descriptors.
TEST(Watcher, CallsBackOnceForEachAndForNoOther) {
  constexpr int kAll = 60;
  auto watcher = Watcher::start();
  ASSERT_TRUE(watcher.ok());
  std::vector<std::unique_ptr<TestAttempt>> attempts;
  std::vector<std::unique_ptr<std::atomic<int>>> calls;
  std::atomic<int> early = 0;
  for (int n = 0; n < kAll; ++n) {
    attempts.push_back(std::make_unique<TestAttempt>());
    calls.push_back(std::make_unique<std::atomic<int>>(0));
    const auto pid = launch(attempts.back()->options("exit 0"));
    ASSERT_TRUE(pid.ok());
    ASSERT_TRUE((*watcher)->add(*pid, [&early, count = calls.back().get(), attempt = attempts.back().get()] {
      if (attempt->read(kEndedFile).empty()) ++early;
      ++*count;
    }).ok());
  }
  EXPECT_TRUE(eventually([&] {
    return std::all_of(calls.begin(), calls.end(), [](const auto& count) { return *count > 0; });
  }));
  for (const auto& count : calls) EXPECT_EQ(*count, 1);
  EXPECT_EQ(early, 0) << "called before its runner had gone";
}

TEST(Watcher, RefusesAProcessThatIsNotThere) {
  auto watcher = Watcher::start();
  ASSERT_TRUE(watcher.ok());
  const pid_t gone = fork();
  if (gone == 0) _exit(0);
  waitpid(gone, nullptr, 0);
  EXPECT_TRUE(absl::IsNotFound((*watcher)->add(gone, [] {})));
}

}  // namespace
}  // namespace drover::process
