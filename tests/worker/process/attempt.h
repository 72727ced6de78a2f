// An attempt's folder and a program under a real runner; everything ends with it.
#pragma once

#include <sys/types.h>

#include <string>

#include "process/attempt_folder.h"
#include "process/files.h"
#include "process/launch.h"
#include "process/survey.h"

namespace drover::process {

class TestAttempt {
 public:
  TestAttempt();
  ~TestAttempt();  // ends what is left of it and removes its folder

  Launch options(const std::string& shell) const;  // runs `sh -c shell`; limit 20 s, grace 300 ms
  void start(const Launch& launch);
  void start(const std::string& shell) { start(options(shell)); }
  // Waits for the runner to go; what it recorded.
  Ended wait();

  const std::string& folder() const { return folder_; }
  std::string work() const { return root_ + "/work"; }
  std::string read(const std::string& name) const;       // in the attempt's folder
  bool wait_for(const std::string& path) const;           // until the file is there
  Found found() const;
  pid_t runner() const { return runner_; }

 private:
  std::string root_, folder_;
  pid_t runner_ = 0;
  bool gone_ = false;
};

// Waits for a condition, with a far limit.
template <class Condition>
bool eventually(Condition holds);

}  // namespace drover::process

#include <chrono>
#include <thread>

template <class Condition>
bool drover::process::eventually(Condition holds) {
  for (int tries = 0; tries < 3000; ++tries) {
    if (holds()) return true;
    std::this_thread::sleep_for(std::chrono::milliseconds(10));
  }
  return false;
}
