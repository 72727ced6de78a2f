// What a runner does with programs that behave badly.
#include <elf.h>
#include <gtest/gtest.h>
#include <signal.h>
#include <sys/stat.h>

#include <cerrno>
#include <fstream>
#include <string>

#include "absl/strings/numbers.h"
#include "absl/strings/str_cat.h"
#include "worker/process/attempt.h"

namespace drover::process {
namespace {

TEST(Runner, RecordsEveryExitCode) {
  for (const int code : {0, 1, 42, 127, 255}) {
    TestAttempt attempt;
    attempt.start(absl::StrCat("exit ", code));
    const Ended ended = attempt.wait();
    EXPECT_EQ(ended.cause, Ended::Cause::kExited);
    EXPECT_EQ(ended.exit_code, code);
    EXPECT_FALSE(ended.signal.has_value());
  }
}

TEST(Runner, RecordsTheSignalThatEndedIt) {
  for (const int signal : {SIGSEGV, SIGABRT, SIGKILL}) {
    TestAttempt attempt;
    attempt.start(absl::StrCat("kill -", signal, " $$"));
    const Ended ended = attempt.wait();
    EXPECT_EQ(ended.signal, signal);
    EXPECT_FALSE(ended.exit_code.has_value());
    EXPECT_FALSE(ended.killed_by_us) << "it came from elsewhere";
  }
}

TEST(Runner, RecordsWhoItRunsBeforeItsFirstInstruction) {
  TestAttempt attempt;
  attempt.start(absl::StrCat("cat ", attempt.folder(), "/begun; echo self $$"));
  attempt.wait();
  const std::string out = attempt.read(kStdoutFile);
  const auto begun = parse_begun(out.substr(0, out.find("self ")));
  ASSERT_TRUE(begun.ok()) << begun.status() << out;
  EXPECT_EQ(begun->run, 7);
  EXPECT_EQ(begun->fence, 2);
  EXPECT_EQ(out.substr(out.find("self ")), absl::StrCat("self ", begun->child.pid, "\n"));
  EXPECT_EQ(begun->runner.pid, attempt.runner());
}

TEST(Runner, SaysWhyAProgramCouldNotBeStarted) {
  TestAttempt attempt;
  Launch launch = attempt.options("");
  launch.command = {"/nowhere/program"};
  attempt.start(launch);
  const Ended ended = attempt.wait();
  EXPECT_EQ(ended.cause, Ended::Cause::kLaunchFailed);
  EXPECT_EQ(ended.launch_errno, ENOENT);
}

TEST(Runner, GivesTheProgramWhatItWasToldAndNothingElse) {
  TestAttempt attempt;
  attempt.start(
      "env | sort; pwd; readlink /proc/self/fd/0; ls /proc/self/fd | wc -l; for f in /proc/$$/fd/*; do readlink $f; "
      "done");
  attempt.wait();
  const std::string out = attempt.read(kStdoutFile);
  EXPECT_NE(out.find("MARK=yes\n"), std::string::npos) << out;
  EXPECT_EQ(out.find("HOME="), std::string::npos) << out;
  EXPECT_NE(out.find(attempt.work() + "\n"), std::string::npos) << out;
  EXPECT_NE(out.find("/dev/null\n"), std::string::npos) << out;
  EXPECT_NE(out.find("/alive\n"), std::string::npos) << "the lock that tells whether it lives";
  for (const char* const leaked : {"/watch\n", "/begun", "pipe:", "socket:", "pidfd"}) {
    EXPECT_EQ(out.find(leaked), std::string::npos) << out;
  }
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

TEST(Runner, EndsWhatAProgramLeavesBehindInASessionOfItsOwn) {
  TestAttempt attempt;
  attempt.start(
      "setsid sh -c 'echo $$ > daemon; trap \"\" TERM; sleep 60' & while [ ! -s daemon ]; do sleep 0.02; done; exit 0");
  const Ended ended = attempt.wait();
  EXPECT_EQ(ended.exit_code, 0);
  std::ifstream file(attempt.work() + "/daemon");
  pid_t daemon = 0;
  file >> daemon;
  ASSERT_GT(daemon, 0);
  EXPECT_FALSE(stat_of(daemon).has_value());
}

TEST(Runner, KeepsHeadAndTailOfAFloodWithinItsCapAndItsOwnMemorySmall) {
  TestAttempt attempt;
  Launch launch =
      attempt.options("echo the head; head -c 200000000 /dev/zero; sleep 0.5; echo the tail; touch done; sleep 0.5");
  launch.output_cap_bytes = 1 << 20;
  attempt.start(launch);
  ASSERT_TRUE(attempt.wait_for(attempt.work() + "/done"));
  std::ifstream status(absl::StrCat("/proc/", attempt.runner(), "/status"));
  std::int64_t peak_kib = 0;
  for (std::string word; status >> word;) {
    if (word == "VmHWM:") status >> peak_kib;
  }
  attempt.wait();
  struct stat info {};
  ASSERT_EQ(stat((attempt.folder() + "/stdout").c_str(), &info), 0);
  EXPECT_LE(info.st_blocks * 512, 2 << 20);
  const std::string out = attempt.read(kStdoutFile);
  EXPECT_TRUE(out.starts_with("the head\n"));
  EXPECT_TRUE(out.ends_with("the tail\n"));
  EXPECT_GT(peak_kib, 0);
#ifndef __SANITIZE_ADDRESS__
  EXPECT_LT(peak_kib, 1024);
#endif
}

TEST(Runner, IsAStaticProgram) {
#ifndef __SANITIZE_ADDRESS__
  std::ifstream file(DROVER_BIN "/drover-runner", std::ios::binary);
  Elf64_Ehdr header{};
  file.read(reinterpret_cast<char*>(&header), sizeof(header));
  for (int i = 0; i < header.e_phnum; ++i) {
    Elf64_Phdr segment{};
    file.seekg(static_cast<std::streamoff>(header.e_phoff + static_cast<unsigned>(i) * sizeof(segment)));
    file.read(reinterpret_cast<char*>(&segment), sizeof(segment));
    EXPECT_NE(segment.p_type, static_cast<Elf64_Word>(PT_INTERP));
  }
#endif
}

}  // namespace
}  // namespace drover::process
