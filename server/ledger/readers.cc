#include "ledger/readers.h"

#include <utility>

#include "status/try.h"

namespace drover::ledger {

absl::StatusOr<std::unique_ptr<Readers>> Readers::open(const std::string& folder, int threads) {
  std::unique_ptr<Readers> readers(new Readers);
  for (int n = 0; n < threads; ++n) {
    DROVER_ASSIGN(std::unique_ptr<store::Reader> reader, store::Reader::open(folder));
    readers->readers_.push_back(std::move(reader));
  }
  for (const std::unique_ptr<store::Reader>& reader : readers->readers_) {
    readers->threads_.emplace_back([pool = readers.get(), one = reader.get()] { pool->work(*one); });
  }
  return readers;
}

Readers::~Readers() {
  {
    const std::lock_guard lock(mutex_);
    ending_ = true;
  }
  changed_.notify_all();
  threads_.clear();
}

void Readers::submit(std::function<void(store::Reader&)> read) {
  {
    const std::lock_guard lock(mutex_);
    queue_.push_back(std::move(read));
  }
  changed_.notify_one();
}

void Readers::work(store::Reader& reader) {
  std::unique_lock lock(mutex_);
  while (true) {
    changed_.wait(lock, [this] { return ending_ || !queue_.empty(); });
    if (queue_.empty()) return;
    const std::function<void(store::Reader&)> read = std::move(queue_.front());
    queue_.pop_front();
    lock.unlock();
    // Without a snapshot the questions fail by themselves, in words.
    static_cast<void>(reader.begin_snapshot());
    read(reader);
    reader.end_snapshot();
    lock.lock();
  }
}

}  // namespace drover::ledger
