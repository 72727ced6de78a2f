#include "worker/process/attempt.h"

#include <gtest/gtest.h>
#include <sys/wait.h>

#include <cstdlib>
#include <filesystem>

#include "process/leftovers.h"

namespace drover::process {

TestAttempt::TestAttempt() {
  root_ = (std::filesystem::temp_directory_path() / "drover-attempt-XXXXXX").string();
  if (mkdtemp(root_.data()) == nullptr) std::abort();
  folder_ = root_ + "/attempt";
  std::filesystem::create_directory(folder_);
  std::filesystem::create_directory(work());
}

TestAttempt::~TestAttempt() {
  RealFiles files;
  EXPECT_TRUE(end_leftovers(files, folder_, boot_id(), absl::Milliseconds(300)).ok());
  if (runner_ > 0 && !gone_) waitpid(runner_, nullptr, 0);
  std::error_code ignored;
  std::filesystem::remove_all(root_, ignored);
}

Launch TestAttempt::options(const std::string& shell) const {
  return {.runner = DROVER_BIN "/drover-runner",
          .folder = folder_,
          .work = work(),
          .run = 7,
          .fence = 2,
          .command = {"/bin/sh", "-c", shell},
          .environment = {"PATH=/usr/bin:/bin", "MARK=yes"},
          .time_limit = absl::Seconds(20),
          .grace = absl::Milliseconds(300)};
}

void TestAttempt::start(const Launch& what) {
  const absl::StatusOr<pid_t> pid = launch(what);
  ASSERT_TRUE(pid.ok()) << pid.status();
  runner_ = *pid;
}

Ended TestAttempt::wait() {
  waitpid(runner_, nullptr, 0);
  gone_ = true;
  const absl::StatusOr<Ended> ended = parse_ended(read(kEndedFile));
  EXPECT_TRUE(ended.ok()) << ended.status() << "\n" << read(kRunnerLogFile);
  return ended.value_or(Ended{});
}

std::string TestAttempt::read(const std::string& name) const {
  return RealFiles().read(folder_ + "/" + name).value_or("");
}

bool TestAttempt::wait_for(const std::string& path) const {
  return eventually([&] { return std::filesystem::exists(path); });
}

Found TestAttempt::found() const {
  const absl::StatusOr<Survey> seen = survey(RealFiles(), folder_, boot_id());
  EXPECT_TRUE(seen.ok()) << seen.status();
  return seen.ok() ? seen->found : Found::kOrdered;
}

}  // namespace drover::process
