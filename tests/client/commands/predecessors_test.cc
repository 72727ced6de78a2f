#include "commands/predecessors.h"

#include <gtest/gtest.h>
#include <signal.h>
#include <sys/wait.h>
#include <unistd.h>

#include <thread>

#include "commands/process.h"
#include "temporary_folder.h"

namespace drover::commands {
namespace {

pid_t sleeper(const TemporaryFolder& folder) {
  const auto child = start_process({.program = "/bin/sleep", .arguments = {"1000"}, .log = folder.file("log")});
  return child.ok() ? *child : 0;
}

TEST(Predecessors, AreThoseThatStillRun) {
  const TemporaryFolder folder;
  const std::string file = folder.file("daemons");
  EXPECT_TRUE(recorded_daemons(file).empty());
  const pid_t first = sleeper(folder), second = sleeper(folder);
  ASSERT_GT(first, 0);
  ASSERT_GT(second, 0);
  ASSERT_TRUE(record_daemons(file, {first, 0, second}).ok());
  EXPECT_EQ(recorded_daemons(file), (std::vector<pid_t>{first, second}));
  kill(first, SIGKILL);
  waitpid(first, nullptr, 0);
  EXPECT_EQ(recorded_daemons(file), std::vector<pid_t>{second});
  kill(second, SIGKILL);
  waitpid(second, nullptr, 0);
}

TEST(Predecessors, AreNotTakenForAnotherProcessWithTheSameNumber) {
  const TemporaryFolder folder;
  const std::string file = folder.write("daemons", std::to_string(getpid()) + " 1\n");
  EXPECT_TRUE(recorded_daemons(file).empty());
}

TEST(Predecessors, AreWaitedForUntilTheyEnd) {
  const TemporaryFolder folder;
  const std::string file = folder.file("daemons");
  const pid_t child = sleeper(folder);
  ASSERT_GT(child, 0);
  ASSERT_TRUE(record_daemons(file, {child}).ok());
  const link::RealClock clock;
  Interruption interruption;
  await_predecessors(file, clock, interruption, absl::ZeroDuration());
  EXPECT_FALSE(recorded_daemons(file).empty()) << "the limit was over";
  std::thread killer([child] { kill(child, SIGKILL); });
  await_predecessors(file, clock, interruption, absl::Hours(1));
  EXPECT_TRUE(recorded_daemons(file).empty());
  killer.join();
  waitpid(child, nullptr, 0);
}

}  // namespace
}  // namespace drover::commands
