#include "worker/session/workshop.h"

#include <gtest/gtest.h>
#include <sys/wait.h>
#include <unistd.h>

#include <atomic>
#include <chrono>
#include <climits>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <utility>

#include "absl/strings/str_cat.h"
#include "absl/strings/str_replace.h"
#include "process/attempt_folder.h"
#include "process/identity.h"

namespace drover::session {
namespace {

namespace fs = std::filesystem;

std::string fresh_folder() {
  std::string path = ::testing::TempDir() + "/session-XXXXXX";
  EXPECT_NE(mkdtemp(path.data()), nullptr);
  return fs::canonical(path).string();
}

std::string fresh_request_id() {
  static std::atomic<int> many = 0;
  return absl::StrCat("request-", getpid(), "-", ++many);
}

}  // namespace

bool eventually(const std::function<bool()>& holds, absl::Duration most) {
  for (absl::Duration left = most; left > absl::ZeroDuration(); left -= absl::Milliseconds(10)) {
    if (holds()) return true;
    std::this_thread::sleep_for(std::chrono::milliseconds(10));
  }
  return false;
}

Workshop::Workshop() : base(fresh_folder()) {}

Workshop::~Workshop() {
  if (thread_.joinable()) {
    EXPECT_TRUE(stop().ok());
  }
  EXPECT_TRUE(eventually([this] { return processes() == 0; })) << processes() << " processes are left in " << base;
  while (waitpid(-1, nullptr, WNOHANG) > 0) continue;  // runners whose daemon was dropped
  std::error_code ignored;
  if (!::testing::Test::HasFailure()) fs::remove_all(base, ignored);
}

code::Definition& Workshop::add_code(const std::string& name, const std::string& script) {
  const std::string program = absl::StrCat(base, "/", name, ".sh");
  std::ofstream(program) << "#!/bin/sh\necho x >> " << base << "/begun\n. ./case.in\n"
                         << absl::StrReplaceAll(script, {{"GATE", base + "/gate"}}) << "\n";
  fs::permissions(program, fs::perms::owner_all);
  code::Definition& made = catalogue.codes.emplace_back();
  made.name = name;
  made.version = "1";
  made.digest = "digest-of-" + name;
  made.folder = base;
  made.command = {program};
  made.path = {"/usr/bin", "/bin"};
  made.time_limit = absl::Seconds(60);
  made.grace = absl::Milliseconds(500);
  v1::Accepted& x = made.accepts.emplace_back();
  x.set_name("x");
  made.inputs.push_back({"case.in", code::Template::parse("x=[=x=]\n", {}, {}).value()});
  code::OutputReader& y = made.outputs.emplace_back();
  y.name = "y";
  y.file = "case.out";
  y.after = "Y=";
  return made;
}

void Workshop::add_usual_codes() {
  add_code("broken", "echo it broke >&2; exit 3");
  add_code("gated", "while [ ! -e GATE ]; do sleep 0.05; done; echo \"Y= $((x * 2))\" > case.out");
  add_code("quick", "echo \"Y= $((x * 2))\" > case.out");
}

void Workshop::open_gate() { std::ofstream(base + "/gate") << "open"; }

int Workshop::begun() const {
  std::ifstream file(base + "/begun");
  int lines = 0;
  for (std::string line; std::getline(file, line);) ++lines;
  return lines;
}

v1::Grant Workshop::grant(std::int64_t run, const std::string& code, double x, std::int64_t fence) const {
  v1::Grant grant;
  grant.set_run(run);
  grant.set_fence(fence);
  grant.set_study("study");
  grant.set_number(run);
  grant.set_code(code);
  grant.set_code_digest("digest-of-" + code);
  v1::NamedValue& value = *grant.add_inputs();
  value.set_name("x");
  value.set_number(x);
  grant.set_input_digest(absl::StrCat("inputs-of-", run));
  return grant;
}

Options Workshop::options() const {
  Options made;
  made.worker = "bench";
  made.version = "0";
  made.slots = 2;
  made.spool = base + "/spool";
  made.scratch = base + "/scratch";
  made.runner = std::string(DROVER_BIN) + "/drover-runner";
  made.machine = this_machine();
  made.times.retry_first = absl::Milliseconds(10);
  made.times.retry_most = absl::Milliseconds(50);
  made.times.disk_retry = absl::Milliseconds(20);
  made.times.farewell = absl::Milliseconds(500);
  made.fresh_id = fresh_request_id;
  return made;
}

void Workshop::start(const Options& options, process::Files& disk) {
  absl::StatusOr<std::unique_ptr<Daemon>> daemon = Daemon::open(options, catalogue, coordinator, disk, clock);
  ASSERT_TRUE(daemon.ok()) << daemon.status();
  daemon_ = *std::move(daemon);
  thread_ = std::thread([this] { ended_ = daemon_->run(); });
}

absl::Status Workshop::stop() {
  daemon_->stop();
  thread_.join();
  daemon_.reset();
  coordinator.reuse();
  return ended_;
}

void Workshop::drop() {
  daemon_->drop_for_test();
  thread_.join();
  daemon_.reset();
  coordinator.reuse();
}

std::string Workshop::attempt_file(const Key& key, const std::string& name) const {
  return absl::StrCat(base, "/spool/attempts/", key.run, ".", key.fence, "/", name);
}

bool Workshop::running(const Key& key) const {
  const absl::StatusOr<std::string> text = files.read(attempt_file(key, process::kBegunFile));
  if (!text.ok()) return false;
  const absl::StatusOr<process::Begun> begun = process::parse_begun(*text);
  return begun.ok() && process::is_alive(begun->child);
}

int Workshop::processes() const {
  int many = 0;
  for (const process::ProcessStat& process : process::all_processes()) {
    std::error_code error;
    const fs::path folder = fs::read_symlink(absl::StrCat("/proc/", process.identity.pid, "/cwd"), error);
    if (!error && process.state != 'Z' && folder.string().rfind(base + "/", 0) == 0) ++many;
  }
  return many;
}

}  // namespace drover::session
