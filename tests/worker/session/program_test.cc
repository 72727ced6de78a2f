// The program drover-worker as a whole, over gRPC on a Unix socket.
#include <fcntl.h>
#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <spawn.h>
#include <sys/wait.h>
#include <unistd.h>

#include <csignal>
#include <filesystem>
#include <fstream>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "code/catalogue.h"
#include "drover/v1/work.grpc.pb.h"
#include "link/channel.h"
#include "link/status.h"
#include "worker/session/fake_coordinator.h"
#include "worker/session/workshop.h"

namespace drover::session {
namespace {

using ::testing::HasSubstr;

// The fake coordinator as a server.
class FakeService final : public v1::Work::Service {
 public:
  explicit FakeService(FakeCoordinator& fake) : fake_(fake) {}
  grpc::Status Enrol(grpc::ServerContext*, const v1::EnrolRequest* request, v1::EnrolResponse* answer) override {
    return pass(fake_.enrol(*request), answer);
  }
  grpc::Status Lease(grpc::ServerContext* context, const v1::LeaseRequest* request,
                     v1::LeaseResponse* answer) override {
    v1::LeaseRequest shorter = *request;  // so that the end of a poll by its client frees this thread soon
    if (request->wait().seconds() > 0) {
      shorter.mutable_wait()->set_seconds(0);
      shorter.mutable_wait()->set_nanos(100'000'000);
    }
    return context->IsCancelled() ? grpc::Status::CANCELLED : pass(fake_.lease(shorter), answer);
  }
  grpc::Status Renew(grpc::ServerContext*, const v1::RenewRequest* request, v1::RenewResponse* answer) override {
    return pass(fake_.renew(*request), answer);
  }
  grpc::Status Report(grpc::ServerContext*, const v1::ReportRequest* request, v1::ReportResponse* answer) override {
    return pass(fake_.report(*request), answer);
  }

 private:
  template <class Answer>
  static grpc::Status pass(const absl::StatusOr<Answer>& from, Answer* to) {
    if (!from.ok()) return link::to_grpc(from.status());
    *to = *from;
    return grpc::Status::OK;
  }
  FakeCoordinator& fake_;
};

class ProgramTest : public ::testing::Test {
 protected:
  ProgramTest() : service_(shop_.coordinator), address_("unix:" + shop_.base + "/c.sock") {
    serve_fake();
    write_code("gated", "while [ ! -e " + shop_.base + "/gate ]; do sleep 0.05; done; echo \"Y= 42\" > case.out");
  }
  ~ProgramTest() override {
    if (pid_ > 0) kill(pid_, SIGKILL);
    if (pid_ > 0) waitpid(pid_, nullptr, 0);
    server_->Shutdown();
  }

  void serve_fake() {
    grpc::ServerBuilder builder;
    link::set_server_options(builder);
    builder.AddListeningPort(address_, grpc::InsecureServerCredentials());
    builder.RegisterService(&service_);
    server_ = builder.BuildAndStart();
    EXPECT_NE(server_, nullptr);
  }

  std::string codes() const { return shop_.base + "/codes"; }

  void write_code(const std::string& name, const std::string& script) {
    const std::string folder = codes() + "/" + name;
    std::filesystem::create_directories(folder);
    std::ofstream(folder + "/run.sh") << "#!/bin/sh\n" << script << "\n";
    std::filesystem::permissions(folder + "/run.sh", std::filesystem::perms::owner_all);
    std::ofstream(folder + "/case.in.in") << "x=[=x=]\n";
    std::ofstream(folder + "/code.toml") << "[code]\nname = \"" << name << "\"\nversion = \"1\"\n"
                                         << "command = [\"run.sh\"]\ntime_limit = \"1m\"\ngrace = \"1s\"\n"
                                         << "[[accepts]]\nname = \"x\"\n"
                                         << "[[input]]\ntemplate = \"case.in.in\"\nwrites = \"case.in\"\n"
                                         << "[[output]]\nname = \"y\"\nfile = \"case.out\"\nafter = \"Y=\"\n";
  }

  v1::Grant grant(std::int64_t run) const {
    v1::Grant made = shop_.grant(run, "gated");
    made.set_code_digest(code::read_catalogue(codes())->find("gated")->digest);
    return made;
  }

  std::vector<std::string> serve() const {
    return {"serve",
            "--coordinator",
            address_,
            "--codes",
            codes(),
            "--name",
            "bench",
            "--spool",
            shop_.base + "/spool",
            "--scratch",
            shop_.base + "/scratch"};
  }

  // Starts the program; its output goes to files in our folder.
  void start(std::vector<std::string> words) {
    words.insert(words.begin(), std::string(DROVER_BIN) + "/drover-worker");
    std::vector<char*> argv;
    for (std::string& word : words) argv.push_back(word.data());
    argv.push_back(nullptr);
    posix_spawn_file_actions_t actions;
    posix_spawn_file_actions_init(&actions);
    const int flags = O_WRONLY | O_CREAT | O_TRUNC;
    posix_spawn_file_actions_addopen(&actions, 1, (shop_.base + "/out").c_str(), flags, 0600);
    posix_spawn_file_actions_addopen(&actions, 2, (shop_.base + "/err").c_str(), flags, 0600);
    ASSERT_EQ(posix_spawn(&pid_, argv[0], &actions, nullptr, argv.data(), environ), 0);
    posix_spawn_file_actions_destroy(&actions);
  }
  // Its exit code; -1: it was ended by a signal.
  int wait() {
    int status = 0;
    waitpid(std::exchange(pid_, 0), &status, 0);
    return WIFEXITED(status) ? WEXITSTATUS(status) : -1;
  }
  int run(std::vector<std::string> words) {
    start(std::move(words));
    return wait();
  }
  std::string out() const { return shop_.files.read(shop_.base + "/out").value_or(""); }
  std::string err() const { return shop_.files.read(shop_.base + "/err").value_or(""); }

  Workshop shop_;
  FakeService service_;
  std::string address_;
  std::unique_ptr<grpc::Server> server_;
  pid_t pid_ = 0;
};

TEST_F(ProgramTest, RunsWhatItIsGrantedAndEndsInOrder) {
  shop_.coordinator.grant(grant(1));
  start(serve());
  ASSERT_TRUE(eventually([&] { return shop_.running({1, 1}); })) << err();
  shop_.open_gate();
  ASSERT_TRUE(shop_.coordinator.eventually([](const auto& c) { return c.reports().size() == 1; })) << err();
  EXPECT_EQ(shop_.coordinator.reports().at({1, 1}).outputs(0).value(), 42) << err();
  kill(pid_, SIGTERM);
  EXPECT_EQ(wait(), 0) << err();
  EXPECT_THAT(err(), HasSubstr("run=1 attempt=1 study=study"));
}

TEST_F(ProgramTest, LeavesItsSimulationsToTheNextStartWhenItIsKilled) {
  shop_.coordinator.grant(grant(1));
  start(serve());
  ASSERT_TRUE(eventually([&] { return shop_.running({1, 1}); })) << err();
  kill(pid_, SIGKILL);
  EXPECT_EQ(wait(), -1);
  EXPECT_TRUE(shop_.running({1, 1}));
  start(serve());
  ASSERT_TRUE(shop_.coordinator.eventually([](const auto& c) { return c.reports().size() == 1; })) << err();
  EXPECT_EQ(shop_.coordinator.reports().at({1, 1}).loss(), v1::LOSS_REASON_DAEMON_RESTART) << err();
  EXPECT_FALSE(shop_.running({1, 1}));
  kill(pid_, SIGTERM);
  EXPECT_EQ(wait(), 0) << err();
}

TEST_F(ProgramTest, FindsACoordinatorThatComesBackLater) {
  server_->Shutdown();
  server_.reset();
  start(serve());
  ASSERT_TRUE(eventually([&] { return err().find("starting") != std::string::npos; }));
  serve_fake();
  EXPECT_TRUE(shop_.coordinator.eventually([](const auto& c) { return !c.leases().empty(); })) << err();
  kill(pid_, SIGTERM);
  EXPECT_EQ(wait(), 0) << err();
}

TEST_F(ProgramTest, EndsAtOnceAtASecondSignal) {
  const std::string slow = codes() + "/gated/run.sh";
  std::ofstream(slow) << "#!/bin/sh\ntrap '' TERM\nwhile [ ! -e " << shop_.base << "/gate ]; do sleep 0.05; done\n";
  std::filesystem::permissions(slow, std::filesystem::perms::owner_all);
  shop_.coordinator.grant(grant(1));
  start(serve());
  ASSERT_TRUE(eventually([&] { return shop_.running({1, 1}); })) << err();
  kill(pid_, SIGTERM);
  ASSERT_TRUE(eventually([&] { return err().find("stopping") != std::string::npos; }));
  // Signals that come together are one, so it takes another a moment later.
  int status = 0;
  ASSERT_TRUE(eventually([&] {
    kill(pid_, SIGTERM);
    return waitpid(pid_, &status, WNOHANG) == pid_;
  }));
  pid_ = 0;
  EXPECT_EQ(WEXITSTATUS(status), 1);
  EXPECT_TRUE(shop_.running({1, 1})) << "its runner looks after it";
  shop_.open_gate();
}

TEST_F(ProgramTest, EndsWithTheProcessThatOwnsIt) {
  int ends[2];
  ASSERT_EQ(pipe2(ends, O_CLOEXEC), 0);
  pid_t owner = 0;
  posix_spawn_file_actions_t actions;
  posix_spawn_file_actions_init(&actions);
  posix_spawn_file_actions_adddup2(&actions, ends[0], 0);
  char program[] = "/bin/cat";
  char* argv[] = {program, nullptr};
  ASSERT_EQ(posix_spawn(&owner, program, &actions, nullptr, argv, environ), 0);
  posix_spawn_file_actions_destroy(&actions);
  close(ends[0]);
  std::vector<std::string> words = serve();
  words.insert(words.end(), {"--end-with-pid", std::to_string(owner)});
  start(words);
  EXPECT_TRUE(shop_.coordinator.eventually([](const auto& c) { return !c.enrolments().empty(); })) << err();
  close(ends[1]);
  EXPECT_EQ(wait(), 0) << err();
  waitpid(owner, nullptr, 0);
}

TEST_F(ProgramTest, SaysWhatIsWrongWithItsOptions) {
  struct Row {
    std::string name;
    std::vector<std::string> words;
    std::string says;
  };
  const std::vector<Row> rows = {
      {"no command", {}, "subcommand"},
      {"no codes", {"serve"}, "--codes"},
      {"no such folder", {"serve", "--codes", shop_.base + "/none", "--spool", shop_.base + "/s"}, "/none"},
      {"slots", {"serve", "--codes", codes(), "--slots", "0"}, "slots"},
      {"name", {"serve", "--codes", codes(), "--name", "a/b"}, "a worker's name"},
      {"address", {"serve", "--codes", codes(), "--name", "a", "--coordinator", "nowhere"}, "unix:/path"},
      {"far", {"serve", "--codes", codes(), "--name", "a", "--coordinator", "far.example:1"}, "certificates"},
      {"runner", {"serve", "--codes", codes(), "--name", "a", "--runner", "/none"}, "--runner"},
  };
  for (const Row& row : rows) {
    EXPECT_EQ(run(row.words), 2) << row.name;
    EXPECT_THAT(err(), HasSubstr(row.says)) << row.name;
  }
}

TEST_F(ProgramTest, BeginsItsHelpWithAnExample) {
  EXPECT_EQ(run({"serve", "--help"}), 0);
  EXPECT_THAT(out(), HasSubstr("drover-worker serve --coordinator"));
}

TEST_F(ProgramTest, ShowsItsCodes) {
  EXPECT_EQ(run({"codes", "--codes", codes()}), 0) << err();
  EXPECT_THAT(out(), HasSubstr("gated 1"));
  EXPECT_EQ(run({"codes", "--codes", codes(), "--json"}), 0);
  EXPECT_THAT(out(), HasSubstr("\"name\": \"gated\""));
  write_code("wrong", "true");
  std::ofstream(codes() + "/wrong/code.toml", std::ios::app) << "[healthi]\n";
  EXPECT_EQ(run({"codes", "--codes", codes()}), 2);
  EXPECT_THAT(err(), HasSubstr("code.toml:1"));
  EXPECT_THAT(err(), HasSubstr("healthi"));
  EXPECT_THAT(out(), HasSubstr("gated 1")) << "the right ones are shown all the same";
}

}  // namespace
}  // namespace drover::session
