// What a runner gives its program, and what it records of it.
#include <elf.h>
#include <fcntl.h>
#include <gtest/gtest.h>
#include <signal.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <fstream>
#include <string>
#include <vector>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_split.h"
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

TEST(Runner, GivesTheProgramItsEnvironmentAndFolderAndNoOther) {
  TestAttempt attempt;
  attempt.start(
      "env | grep -v -e ^PWD= -e ^OLDPWD= -e ^SHLVL= -e ^_= | sort; pwd; umask; ulimit -c; "
      "grep NoNewPrivs /proc/self/status");
  attempt.wait();
  EXPECT_EQ(attempt.read(kStdoutFile),
            absl::StrCat("MARK=yes\nPATH=/usr/bin:/bin\n", attempt.work(), "\n0077\n0\nNoNewPrivs:\t1\n"));
}

// Exactly three and the lock that tells whether it lives, though whoever launches it leaks descriptors of its own.
TEST(Runner, GivesTheProgramNoDescriptorThatIsNotItsOwn) {
  TestAttempt attempt;
  int leaked[2] = {-1, -1};
  ASSERT_EQ(pipe(leaked), 0);
  ASSERT_EQ(fcntl(leaked[0], F_DUPFD, 200), 200);
  attempt.start("for f in /proc/$$/fd/*; do readlink $f; done");
  attempt.wait();
  for (const int file : {leaked[0], leaked[1], 200}) close(file);
  std::vector<std::string> open_there = absl::StrSplit(attempt.read(kStdoutFile), '\n', absl::SkipEmpty());
  std::sort(open_there.begin(), open_there.end());
  std::vector<std::string> expected = {"/dev/null"};
  for (const char* const name : {kAliveFile, kStderrFile, kStdoutFile}) {
    expected.push_back(absl::StrCat(attempt.folder(), "/", name));
  }
  std::sort(expected.begin(), expected.end());
  EXPECT_EQ(open_there, expected);
}

TEST(Runner, BeginsAnAttemptOnce) {
  TestAttempt attempt;
  attempt.start("echo first; exit 3");
  attempt.wait();
  attempt.start("echo second; exit 0");
  EXPECT_EQ(attempt.wait().exit_code, 3);
  EXPECT_EQ(attempt.read(kStdoutFile), "first\n");
  EXPECT_NE(attempt.read(kRunnerLogFile).find("begun"), std::string::npos) << "why it did nothing";
}

TEST(Runner, RecordsWhatItTook) {
  TestAttempt attempt;
  attempt.start("head -c 100000000 /dev/zero | sha256sum; sleep 0.2");
  const Ended ended = attempt.wait();
  EXPECT_GE(ended.wall, absl::Milliseconds(200));
  EXPECT_GT(ended.user_cpu, absl::Milliseconds(5));
  EXPECT_LT(ended.user_cpu + ended.system_cpu, 8 * ended.wall);
  EXPECT_GT(ended.peak_memory_bytes, 100 << 10);
  EXPECT_LT(ended.peak_memory_bytes, 100 << 20);
}

TEST(Runner, KeepsHeadAndTailOfAFloodWithinItsCapAndItsOwnMemorySmall) {
  TestAttempt attempt;
  Launch launch = attempt.options(
      "echo the head; head -c 200000000 /dev/zero; echo the tail; touch done; "
      "while [ ! -e go ]; do sleep 0.02; done");
  launch.output_cap_bytes = 1 << 20;
  attempt.start(launch);
  ASSERT_TRUE(attempt.wait_for(attempt.work() + "/done"));
  std::ifstream status(absl::StrCat("/proc/", attempt.runner(), "/status"));
  std::int64_t peak_kib = 0;
  for (std::string word; status >> word;) {
    if (word == "VmHWM:") status >> peak_kib;
  }
  std::ofstream(attempt.work() + "/go");
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
