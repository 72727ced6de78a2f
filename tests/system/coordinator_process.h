// A coordinator as a process of its own, for tests that speak the contract to it and kill it.
#pragma once

#include <sys/types.h>

#include <memory>
#include <string>

#include <grpcpp/grpcpp.h>

namespace drover::system_test {

class CoordinatorProcess {
 public:
  CoordinatorProcess();   // with an empty data folder; not started
  ~CoordinatorProcess();  // ends it and removes the folder

  // Starts it and waits until it answers; `ok()` is false when it does not.
  void start();
  bool ok() const { return ok_; }
  void kill();  // SIGKILL, and waits for its end
  std::shared_ptr<grpc::Channel> channel() const;  // a new one
  const std::string& folder() const { return folder_; }

 private:
  std::string folder_;
  pid_t pid_ = 0;
  bool ok_ = false;
};

}  // namespace drover::system_test
