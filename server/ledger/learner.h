// A study's own thread: learns outcomes in their order and asks ahead, so that no Lease ever waits for a method.
//
// The settling commit fixed each outcome's position; this thread reads them from the store, lets the method learn
// them, and hands new asks, the method's state and `absorbed_through` to the ledger in one commit. Whatever happens in
// between (a crash, a commit that fails) the method is thrown away and loaded from what is on disk: it catches up by
// itself (design.md, section 4).
#pragma once

#include <condition_variable>
#include <cstdint>
#include <functional>
#include <map>
#include <memory>
#include <mutex>
#include <string>
#include <thread>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "ledger/ledger.h"
#include "search/method.h"
#include "store/reader.h"
#include "study/plan.h"

namespace drover::ledger {

// Owns one thread for each open study. Thread-safe.
class Learners {
 public:
  Learners(std::string folder, Ledger& ledger);  // the ledger must outlive this
  ~Learners();
  Learners(const Learners&) = delete;
  Learners& operator=(const Learners&) = delete;

  // Something happened to the study: starts its thread if it has none, wakes it otherwise. Does not block.
  void poke(std::int64_t study);
  // Lets every thread finish what it does and joins them.
  void stop();

 private:
  class Learner;
  std::string folder_;
  Ledger& ledger_;
  std::mutex mutex_;
  std::map<std::int64_t, std::unique_ptr<Learner>> learners_;
  bool stopping_ = false;
};

}  // namespace drover::ledger
