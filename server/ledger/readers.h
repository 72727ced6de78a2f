// A few threads that read the store beside the writer, so that no read waits for a commit or blocks an RPC's thread.
#pragma once

#include <condition_variable>
#include <deque>
#include <functional>
#include <memory>
#include <mutex>
#include <string>
#include <thread>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "store/reader.h"

namespace drover::ledger {

// Thread-safe. The destructor runs what was handed in, then joins.
class Readers {
 public:
  static absl::StatusOr<std::unique_ptr<Readers>> open(const std::string& folder, int threads);
  ~Readers();
  Readers(const Readers&) = delete;
  Readers& operator=(const Readers&) = delete;

  // Runs `read` soon on one of the threads.
  void submit(std::function<void(store::Reader&)> read);

 private:
  Readers() = default;
  void work(store::Reader& reader);

  std::mutex mutex_;
  std::condition_variable changed_;
  std::deque<std::function<void(store::Reader&)>> queue_;
  bool ending_ = false;
  std::vector<std::unique_ptr<store::Reader>> readers_;
  std::vector<std::jthread> threads_;
};

}  // namespace drover::ledger
