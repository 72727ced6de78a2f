// The program as others see it: a deck in, a report and an exit code out.
#include <fcntl.h>
#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <signal.h>
#include <spawn.h>
#include <sys/wait.h>
#include <unistd.h>

#include <chrono>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <string>
#include <vector>

#include "penstock/cost.h"
#include "penstock/rejection.h"
#include "penstock/report.h"
#include "reference/penstock/demo_deck.h"

namespace penstock {
namespace {

using testing::HasSubstr;
using testing::Not;
using testing::StartsWith;

class Folder {
 public:
  Folder() {
    std::string name = testing::TempDir() + "penstock-XXXXXX";
    if (mkdtemp(name.data()) == nullptr) std::abort();
    path_ = name;
  }
  ~Folder() { std::filesystem::remove_all(path_); }
  Folder(const Folder&) = delete;
  Folder& operator=(const Folder&) = delete;

  std::string operator/(const std::string& name) const { return path_ + "/" + name; }
  std::string write(const std::string& name, const std::string& text) const {
    std::ofstream(*this / name, std::ios::binary) << text;
    return *this / name;
  }

 private:
  std::string path_;
};

// A started penstock-surge; killed when it is dropped before its end.
class Process {
 public:
  // Standard output and error go to the two descriptors.
  Process(const std::vector<std::string>& arguments, int out, int err) {
    std::vector<std::string> words = {DROVER_BIN "/penstock-surge"};
    words.insert(words.end(), arguments.begin(), arguments.end());
    std::vector<char*> argv;
    for (std::string& word : words) argv.push_back(word.data());
    argv.push_back(nullptr);
    posix_spawn_file_actions_t actions;
    posix_spawn_file_actions_init(&actions);
    posix_spawn_file_actions_adddup2(&actions, out, STDOUT_FILENO);
    posix_spawn_file_actions_adddup2(&actions, err, STDERR_FILENO);
    if (posix_spawn(&pid_, argv[0], &actions, nullptr, argv.data(), environ) != 0) std::abort();
    posix_spawn_file_actions_destroy(&actions);
  }
  ~Process() {
    if (pid_ == 0) return;
    kill(pid_, SIGKILL);
    wait();
  }
  Process(const Process&) = delete;
  Process& operator=(const Process&) = delete;

  void end(int signal) { kill(pid_, signal); }
  int wait() {
    int status = 0;
    waitpid(pid_, &status, 0);
    pid_ = 0;
    return status;
  }

 private:
  pid_t pid_ = 0;
};

struct Ended {
  int exit_code = -1;  // -1: by a signal
  std::string out, err;
};

Ended run(const Folder& folder, const std::vector<std::string>& arguments) {
  const int out = open((folder / "stdout").c_str(), O_CREAT | O_TRUNC | O_WRONLY | O_CLOEXEC, 0600);
  const int err = open((folder / "stderr").c_str(), O_CREAT | O_TRUNC | O_WRONLY | O_CLOEXEC, 0600);
  Process process(arguments, out, err);
  close(out);
  close(err);
  const int status = process.wait();
  return {.exit_code = WIFEXITED(status) ? WEXITSTATUS(status) : -1,
          .out = text_of(folder / "stdout"),
          .err = text_of(folder / "stderr")};
}

TEST(PenstockSurge, WritesTheReportThatTheLibraryGives) {
  const Folder folder;
  const Case c = demo_case();
  const std::string deck = folder.write("case.inp", demo_deck());

  const Ended ended = run(folder, {deck});

  const Steady steady = steady_state(c);
  const Rejection rejection = reject_load(c, steady, [](double, double, double) {});
  EXPECT_EQ(ended.exit_code, 0);
  EXPECT_EQ(ended.err, "");
  EXPECT_EQ(text_of(folder / "case.out"), report(c, steady, rejection, cost_of(c)));
  EXPECT_NEAR(number_after(text_of(folder / "case.out"), "PEAK PRESSURE"), rejection.peak_pressure_mpa, 5.1e-6);
  EXPECT_NEAR(number_after(text_of(folder / "case.out"), " POWER "), steady.power_kw, 5.1e-4);
}

TEST(PenstockSurge, WritesTheReportWhereTheDeckSays) {
  const Folder folder;
  const std::string deck = folder.write("case.inp", "REPORT FILE         other.txt\n" + demo_deck());

  const Ended ended = run(folder, {deck});

  EXPECT_EQ(ended.exit_code, 0);
  EXPECT_THAT(text_of(folder / "other.txt"), HasSubstr("PEAK PRESSURE"));
  EXPECT_FALSE(std::filesystem::exists(folder / "case.out"));
}

TEST(PenstockSurge, EndsWithZeroAndSaysFatalWhenThePipeBursts) {
  const Folder folder;
  const std::string deck = folder.write("case.inp", demo_deck({{"wall", "5.0"}}));

  const Ended ended = run(folder, {deck});

  EXPECT_EQ(ended.exit_code, 0);
  EXPECT_THAT(text_of(folder / "case.out"), HasSubstr("*** FATAL: PIPE BURSTS"));
  EXPECT_THAT(text_of(folder / "case.out"), Not(HasSubstr("PEAK PRESSURE")));
}

TEST(PenstockSurge, EndsWithZeroAndSaysFatalWhenTheColumnSeparates) {
  const Folder folder;
  const std::string deck =
      folder.write("case.inp", demo_deck({{"closing_time", "3.0"}, {"wall", "14.0"}, {"steel", "S460"}}));

  const Ended ended = run(folder, {deck});

  EXPECT_EQ(ended.exit_code, 0);
  EXPECT_THAT(text_of(folder / "case.out"), HasSubstr("*** FATAL: COLUMN SEPARATES"));
}

TEST(PenstockSurge, RefusesAMalformedDeckWithItsLine) {
  const Folder folder;
  const std::string deck = folder.write("case.inp", "* a comment\nPIPE DIAMETER       wide\nEND\n");

  const Ended ended = run(folder, {deck});

  EXPECT_EQ(ended.exit_code, 2);
  EXPECT_THAT(ended.err, HasSubstr(deck + ":2: \"wide\" of card \"PIPE DIAMETER\" is not a number"));
  EXPECT_FALSE(std::filesystem::exists(folder / "case.out"));
}

TEST(PenstockSurge, RefusesWhatItCannotReadOrWrite) {
  const Folder folder;
  const std::string nowhere = folder.write("nowhere.inp", "REPORT FILE         none/case.out\n" + demo_deck());
  const std::string onto_itself = folder.write("itself.out", demo_deck());

  EXPECT_EQ(run(folder, {folder / "absent.inp"}).exit_code, 2);
  EXPECT_THAT(run(folder, {folder / "absent.inp"}).err, HasSubstr("cannot read deck " + (folder / "absent.inp")));
  EXPECT_EQ(run(folder, {folder / ""}).exit_code, 2);
  EXPECT_EQ(run(folder, {nowhere}).exit_code, 2);
  EXPECT_THAT(run(folder, {nowhere}).err, HasSubstr("cannot write report"));
  EXPECT_EQ(run(folder, {onto_itself}).exit_code, 2);
  EXPECT_EQ(text_of(onto_itself), demo_deck());
}

TEST(PenstockSurge, RefusesWrongUsage) {
  const Folder folder;
  const std::string deck = folder.write("case.inp", demo_deck());

  EXPECT_EQ(run(folder, {}).exit_code, 2);
  EXPECT_EQ(run(folder, {deck, deck}).exit_code, 2);
  EXPECT_EQ(run(folder, {deck, "--second", "1"}).exit_code, 2);
  EXPECT_EQ(run(folder, {deck, "--seconds"}).exit_code, 2);
  EXPECT_EQ(run(folder, {deck, "--seconds", "-1"}).exit_code, 2);
  EXPECT_EQ(run(folder, {deck, "--seconds", "1s"}).exit_code, 2);
  EXPECT_EQ(run(folder, {deck, "--seconds", "nan"}).exit_code, 2);
  EXPECT_FALSE(std::filesystem::exists(folder / "case.out"));
}

TEST(PenstockSurge, ExplainsItself) {
  const Folder folder;

  const Ended ended = run(folder, {"--help"});

  EXPECT_EQ(ended.exit_code, 0);
  EXPECT_THAT(ended.out, StartsWith("usage: penstock-surge DECK"));
}

TEST(PenstockSurge, TakesTheSecondsAskedForAlsoWhenThePlantBreaksAtOnce) {
  const Folder folder;
  for (const char* wall : {"9.0", "3.0"}) {
    const std::string deck = folder.write("case.inp", demo_deck({{"wall", wall}}));
    const auto start = std::chrono::steady_clock::now();

    const Ended ended = run(folder, {deck, "--seconds", "0.2"});

    EXPECT_EQ(ended.exit_code, 0);
    EXPECT_GE(std::chrono::steady_clock::now() - start, std::chrono::milliseconds(200)) << wall;
  }
}

TEST(PenstockSurge, TellsHowFarItIsAndCanBeEndedMeanwhile) {
  const Folder folder;
  const std::string deck = folder.write("case.inp", demo_deck());
  int ends[2];
  ASSERT_EQ(pipe2(ends, O_CLOEXEC), 0);
  Process process({deck, "--seconds", "3600"}, ends[1], STDERR_FILENO);
  close(ends[1]);

  char first_line[64] = {};
  const ssize_t got = read(ends[0], first_line, sizeof first_line - 1);
  process.end(SIGTERM);
  const int status = process.wait();
  close(ends[0]);

  EXPECT_GT(got, 0);
  EXPECT_THAT(first_line, StartsWith("TIME "));
  EXPECT_TRUE(WIFSIGNALED(status));
  EXPECT_EQ(WTERMSIG(status), SIGTERM);
  EXPECT_FALSE(std::filesystem::exists(folder / "case.out"));
}

}  // namespace
}  // namespace penstock
