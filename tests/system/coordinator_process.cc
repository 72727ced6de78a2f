#include "system/coordinator_process.h"

#include <signal.h>
#include <spawn.h>
#include <sys/wait.h>
#include <unistd.h>

#include <chrono>
#include <cstdlib>
#include <filesystem>
#include <thread>
#include <vector>

#include "drover/v1/studies.grpc.pb.h"

extern char** environ;

namespace drover::system_test {

CoordinatorProcess::CoordinatorProcess() {
  std::string pattern = "/tmp/drover-test-XXXXXX";
  folder_ = mkdtemp(pattern.data());
}

CoordinatorProcess::~CoordinatorProcess() {
  kill();
  std::error_code ignored;
  std::filesystem::remove_all(folder_, ignored);
}

void CoordinatorProcess::start() {
  std::vector<std::string> words = {DROVER_BIN "/drover-coordinator", "serve", "--data", folder_ + "/data", "--listen",
                                    "unix:" + folder_ + "/s/c.sock"};
  std::vector<char*> arguments;
  for (std::string& word : words) arguments.push_back(word.data());
  arguments.push_back(nullptr);
  ok_ = posix_spawn(&pid_, arguments[0], nullptr, nullptr, arguments.data(), environ) == 0;
  for (int tries = 0; ok_ && tries < 600; ++tries) {
    grpc::ClientContext context;
    v1::Coordinator coordinator;
    if (v1::Studies::NewStub(channel())->GetCoordinator(&context, {}, &coordinator).ok()) return;
    std::this_thread::sleep_for(std::chrono::milliseconds(50));
  }
  ok_ = false;
}

void CoordinatorProcess::kill() {
  if (pid_ == 0) return;
  ::kill(pid_, SIGKILL);
  waitpid(pid_, nullptr, 0);
  pid_ = 0;
}

std::shared_ptr<grpc::Channel> CoordinatorProcess::channel() const {
  grpc::ChannelArguments arguments;
  arguments.SetInt(GRPC_ARG_USE_LOCAL_SUBCHANNEL_POOL, 1);
  return grpc::CreateCustomChannel("unix:" + folder_ + "/s/c.sock", grpc::InsecureChannelCredentials(), arguments);
}

}  // namespace drover::system_test
