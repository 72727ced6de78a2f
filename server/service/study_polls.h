// Clients that wait for a study to go on.
#pragma once

#include <cstdint>
#include <functional>
#include <list>
#include <map>
#include <memory>
#include <mutex>
#include <set>
#include <vector>

#include <grpcpp/alarm.h>

#include "absl/time/time.h"

namespace drover::service {

// Thread-safe. Each poll's `wake` is called once: when its study changed, when its time is over, or at the end.
class StudyPolls {
 public:
  using Wake = std::function<void()>;
  ~StudyPolls();

  void add(std::int64_t study, absl::Duration wait, Wake wake);
  // Wakes everybody who waits for one of the studies.
  void changed(const std::set<std::int64_t>& studies);
  // Wakes everybody; from now on add() wakes at once.
  void end();

 private:
  struct Poll {
    Wake wake;
    grpc::Alarm alarm;
    bool woken = false;
  };
  void wake(const std::shared_ptr<Poll>& poll);
  std::vector<std::shared_ptr<Poll>> take(std::int64_t study);

  std::mutex mutex_;
  std::multimap<std::int64_t, std::shared_ptr<Poll>> polls_;
  bool ended_ = false;
};

}  // namespace drover::service
