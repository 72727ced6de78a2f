// How a daemon ends what a predecessor left running.
#include "process/leftovers.h"

#include <fcntl.h>
#include <gtest/gtest.h>
#include <signal.h>
#include <sys/wait.h>
#include <unistd.h>

#include "worker/process/attempt.h"
#include "worker/process/disturbed_files.h"

namespace drover::process {
namespace {

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

// It has closed what leads to stdout, left its session and lost its parents; what it inherited still tells.
TEST(Leftovers, ThatHideAreFoundByTheLockTheyHold) {
  TestAttempt attempt;
  attempt.start("setsid sh -c 'trap \"\" TERM; touch up; while :; do sleep 1; done' > /dev/null 2>&1 & sleep 60");
  ASSERT_TRUE(attempt.wait_for(attempt.work() + "/up"));
  const auto begun = parse_begun(attempt.read(kBegunFile));
  ASSERT_TRUE(begun.ok());
  kill(attempt.runner(), SIGKILL);
  kill(begun->child.pid, SIGKILL);
  ASSERT_TRUE(eventually([&] { return !is_alive(begun->child) && attempt.found() == Found::kUnwatched; }));
  RealFiles files;
  ASSERT_TRUE(end_leftovers(files, attempt.folder(), boot_id(), absl::Milliseconds(300)).ok());
  EXPECT_EQ(attempt.found(), Found::kUnknown);
}

// An order to stop that does not reach the disk does not reach the runner. What ends then is no failure of the code.
TEST(Leftovers, AreEndedThoughTheDiskIsFullAndNoEndOfTheirOwnIsRecorded) {
  TestAttempt attempt;
  attempt.start("touch up; sleep 60");
  ASSERT_TRUE(attempt.wait_for(attempt.work() + "/up"));
  DisturbedFiles files;
  files.write_status = absl::ResourceExhaustedError("full");
  ASSERT_TRUE(end_leftovers(files, attempt.folder(), boot_id(), absl::Milliseconds(300)).ok());
  EXPECT_EQ(attempt.found(), Found::kUnknown);
}

TEST(Leftovers, AreNotWhoeverReadsTheirOutput) {
  TestAttempt attempt;
  attempt.start("touch up; sleep 60");
  ASSERT_TRUE(attempt.wait_for(attempt.work() + "/up"));
  const int stdout_there = open((attempt.folder() + "/stdout").c_str(), O_RDONLY);
  const int alive_there = open((attempt.folder() + "/alive").c_str(), O_RDWR);
  const pid_t reader = fork();
  if (reader == 0) {
    pause();
    _exit(0);
  }
  close(stdout_there);
  close(alive_there);
  kill(attempt.runner(), SIGKILL);
  RealFiles files;
  ASSERT_TRUE(end_leftovers(files, attempt.folder(), boot_id(), absl::Milliseconds(300)).ok());
  EXPECT_EQ(attempt.found(), Found::kUnknown);
  EXPECT_EQ(waitpid(reader, nullptr, WNOHANG), 0) << "a stranger was ended";
  kill(reader, SIGKILL);
  waitpid(reader, nullptr, 0);
}

}  // namespace
}  // namespace drover::process
