#include "commands/daemon.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <signal.h>
#include <unistd.h>

#include <chrono>
#include <functional>
#include <thread>

#include "temporary_folder.h"

namespace drover::commands {
namespace {

using testing::HasSubstr;

bool eventually(const std::function<bool()>& holds) {
  for (int i = 0; i < 2'000; ++i) {
    if (holds()) return true;
    std::this_thread::sleep_for(std::chrono::milliseconds(10));
  }
  return false;
}

ProgramCall shell(const TemporaryFolder& folder, const std::string& script) {
  return {.program = "/bin/sh", .arguments = {"-c", script}, .log = folder.file("log")};
}

// Tends with a clock that runs ten seconds a look, so that no wait is long.
absl::Status tend_until(Daemon& daemon, const std::function<bool()>& holds, absl::Duration* now,
                        absl::Duration step = absl::Seconds(1)) {
  absl::Status status;
  eventually([&] {
    *now += step;
    status = daemon.tend(*now);
    return !status.ok() || holds();
  });
  return status;
}

TEST(Daemon, RunsApartFromThisProcess) {
  const TemporaryFolder folder;
  Daemon daemon("it", shell(folder, "echo begun; ls -l /proc/$$/fd | wc -l; exec sleep 1000"), 1);
  absl::Duration now = absl::ZeroDuration();
  ASSERT_TRUE(daemon.tend(now).ok());
  ASSERT_TRUE(daemon.running());
  EXPECT_NE(getpgid(daemon.pid()), getpgrp());
  EXPECT_TRUE(eventually([&] { return read_file(folder.file("log")).find("begun\n") == 0; }));
  const link::RealClock clock;
  daemon.end(clock);
  EXPECT_FALSE(daemon.running());
}

TEST(Daemon, IsStartedAgainAfterAKill) {
  const TemporaryFolder folder;
  Daemon daemon("it", shell(folder, "echo begun; exec sleep 1000"), 1);
  absl::Duration now = absl::ZeroDuration();
  ASSERT_TRUE(daemon.tend(now).ok());
  const pid_t first = daemon.pid();
  kill(first, SIGKILL);
  now += absl::Seconds(60);  // it ran for a minute
  EXPECT_TRUE(tend_until(
                  daemon, [&] { return daemon.running() && daemon.pid() != first; }, &now)
                  .ok());
  EXPECT_EQ(daemon.take_news(), "it ended by itself (signal 9); it is started again");
  EXPECT_EQ(daemon.take_news(), "");
}

TEST(Daemon, IsGivenUpWithTheEndOfItsLogWhenItDiesAtOnceFiveTimes) {
  const TemporaryFolder folder;
  Daemon daemon("it", shell(folder, "echo the reason; exit 7"), 1);
  absl::Duration now = absl::ZeroDuration();
  const absl::Status status = tend_until(
      daemon, [] { return false; }, &now);
  EXPECT_EQ(status.code(), absl::StatusCode::kAborted);
  EXPECT_THAT(std::string(status.message()), HasSubstr("it ended with exit code 7, 5 times in a row"));
  EXPECT_THAT(std::string(status.message()), HasSubstr("the reason"));
  EXPECT_EQ(read_file(folder.file("log")), "the reason\nthe reason\nthe reason\nthe reason\nthe reason\n");
}

TEST(Daemon, IsGivenUpSoonWhenItsInputIsWrong) {
  const TemporaryFolder folder;
  Daemon daemon("it", shell(folder, "echo wrong; exit 2"), 1);
  absl::Duration now = absl::ZeroDuration();
  EXPECT_EQ(tend_until(
                daemon, [] { return false; }, &now)
                .code(),
            absl::StatusCode::kAborted);
  EXPECT_EQ(read_file(folder.file("log")), "wrong\nwrong\nwrong\n");
}

TEST(Daemon, ThatIsMissingCannotBeStarted) {
  const TemporaryFolder folder;
  Daemon daemon("it", {.program = folder.file("none"), .arguments = {}, .log = folder.file("log")}, 1);
  const absl::Status status = daemon.tend(absl::ZeroDuration());
  EXPECT_EQ(status.code(), absl::StatusCode::kNotFound);
  EXPECT_THAT(std::string(status.message()), HasSubstr("cannot be started"));
}

TEST(Daemon, EndsGracefully) {
  const TemporaryFolder folder;
  Daemon daemon("it", shell(folder, "trap 'echo ended; exit 0' TERM; echo begun; while :; do sleep 0.01; done"), 1);
  ASSERT_TRUE(daemon.tend(absl::ZeroDuration()).ok());
  ASSERT_TRUE(eventually([&] { return read_file(folder.file("log")) == "begun\n"; }));
  const link::RealClock clock;
  daemon.end(clock);
  EXPECT_EQ(read_file(folder.file("log")), "begun\nended\n");
}

TEST(LogTail, ShowsTheLastLinesFitForATerminal) {
  const TemporaryFolder folder;
  EXPECT_EQ(log_tail(folder.file("none")), "");
  const std::string log = folder.write("log", "a\nb\n\nc\x1b[2J\n");
  EXPECT_THAT(log_tail(log, 2), testing::StartsWith("b\nc"));
  EXPECT_EQ(log_tail(log, 2).find('\x1b'), std::string::npos);
}

}  // namespace
}  // namespace drover::commands
