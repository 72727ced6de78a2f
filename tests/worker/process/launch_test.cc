// What a daemon finds of attempts, and how it learns that one has ended.
#include "process/launch.h"

#include <gtest/gtest.h>
#include <signal.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <atomic>
#include <fstream>
#include <memory>
#include <vector>

#include "process/watcher.h"
#include "worker/process/attempt.h"
#include "worker/process/disturbed_files.h"

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

// Between the look for the record and the look at the lock, the runner writes the record and goes.
TEST(Survey, SeesAnEndThatComesWhileItLooks) {
  TestAttempt attempt;
  attempt.start("while [ ! -e go ]; do sleep 0.02; done; exit 5");
  ASSERT_TRUE(attempt.wait_for(attempt.folder() + "/begun"));
  DisturbedFiles files;
  files.after_read = [&](const std::string& path) {
    if (!path.ends_with("/ended")) return;
    std::ofstream(attempt.work() + "/go");
    attempt.wait();
  };
  const auto seen = survey(files, attempt.folder(), boot_id());
  ASSERT_TRUE(seen.ok()) << seen.status();
  ASSERT_EQ(seen->found, Found::kEnded);
  EXPECT_EQ(seen->ended->exit_code, 5);
}

// A lock that cannot be asked (here: a link in its place) must not pass for a free one, nor its run for lost.
TEST(Survey, SaysWhenItCannotKnow) {
  TestAttempt attempt;
  attempt.start("exit 0");
  attempt.wait();
  unlink((attempt.folder() + "/ended").c_str());
  const std::string watch = attempt.folder() + "/watch";
  unlink(watch.c_str());
  ASSERT_EQ(symlink("/dev/null", watch.c_str()), 0);
  const auto seen = survey(RealFiles(), attempt.folder(), boot_id());
  ASSERT_TRUE(absl::IsUnavailable(seen.status()));
  EXPECT_NE(seen.status().message().find(watch), std::string::npos) << seen.status();
  unlink(watch.c_str());
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
