#include "link/stopping.h"

#include <gtest/gtest.h>
#include <sys/wait.h>
#include <unistd.h>

#include <condition_variable>
#include <csignal>
#include <memory>
#include <mutex>
#include <utility>
#include <vector>

namespace drover::link {
namespace {

// Before any thread of this program exists, as main does it: else another thread would die of the signal.
const bool kBlocked = (block_signals(), true);

class Events {
 public:
  StopWatch::Callback callback() {
    return [this](StopCause cause, int count) {
      const std::lock_guard lock(mutex_);
      seen_.emplace_back(cause, count);
      changed_.notify_all();
    };
  }
  std::vector<std::pair<StopCause, int>> wait_for(std::size_t many, absl::Duration most = absl::Seconds(20)) {
    std::unique_lock lock(mutex_);
    changed_.wait_for(lock, absl::ToChronoNanoseconds(most), [&] { return seen_.size() >= many; });
    return seen_;
  }

 private:
  std::mutex mutex_;
  std::condition_variable changed_;
  std::vector<std::pair<StopCause, int>> seen_;
};

// A process that ends when its pipe is closed; reaped by end().
class Owner {
 public:
  Owner() {
    EXPECT_EQ(pipe(ends_), 0);
    pid_ = fork();
    if (pid_ == 0) {
      close(ends_[1]);
      char byte = 0;
      const ssize_t got = read(ends_[0], &byte, 1);
      _exit(got == 0 ? 0 : 1);
    }
    close(ends_[0]);
  }
  ~Owner() {
    finish();
    reap();
  }
  void finish() {
    if (ends_[1] >= 0) close(std::exchange(ends_[1], -1));
  }
  void reap() {
    if (pid_ > 0) waitpid(std::exchange(pid_, -1), nullptr, 0);
  }
  pid_t pid() const { return pid_; }

 private:
  int ends_[2] = {-1, -1};
  pid_t pid_ = -1;
};

TEST(StopWatch, CountsSignals) {
  ASSERT_TRUE(kBlocked);
  Events events;
  const auto watch = StopWatch::start(0, events.callback(), absl::ZeroDuration());
  ASSERT_TRUE(watch.ok());
  kill(getpid(), SIGTERM);
  EXPECT_EQ(events.wait_for(1).size(), 1u);
  kill(getpid(), SIGINT);
  const auto seen = events.wait_for(2);
  ASSERT_EQ(seen.size(), 2u);
  EXPECT_EQ(seen[0], std::pair(StopCause::kSignal, 1));
  EXPECT_EQ(seen[1], std::pair(StopCause::kSignal, 2));
}

TEST(StopWatch, TakesSignalsThatComeTogetherForOne) {
  Owner owner;
  Events events;
  const auto watch = StopWatch::start(owner.pid(), events.callback(), absl::Hours(1));
  ASSERT_TRUE(watch.ok());
  kill(getpid(), SIGINT);
  EXPECT_EQ(events.wait_for(1).size(), 1u);
  kill(getpid(), SIGTERM);
  owner.finish();
  EXPECT_EQ(events.wait_for(2, absl::Milliseconds(200)).size(), 1u) << "the owner's end says nothing new either";
}

TEST(StopWatch, SeesItsOwnerEndBeforeAnybodyReapsIt) {
  Owner owner;
  Events events;
  const auto watch = StopWatch::start(owner.pid(), events.callback());
  ASSERT_TRUE(watch.ok());
  owner.finish();
  const auto seen = events.wait_for(1);
  ASSERT_EQ(seen.size(), 1u);
  EXPECT_EQ(seen[0], std::pair(StopCause::kOwnerGone, 1));
  kill(getpid(), SIGHUP);
  EXPECT_EQ(events.wait_for(2).back(), std::pair(StopCause::kSignal, 2)) << "the signal counts on";
}

TEST(StopWatch, SeesAnOwnerThatHadEndedBefore) {
  Owner owner;
  const pid_t gone = owner.pid();
  owner.finish();
  owner.reap();
  Events events;
  const auto watch = StopWatch::start(gone, events.callback());
  ASSERT_TRUE(watch.ok());
  const auto seen = events.wait_for(1);
  ASSERT_EQ(seen.size(), 1u);
  EXPECT_EQ(seen[0], std::pair(StopCause::kOwnerGone, 1));
}

TEST(StopWatch, EndsQuietly) {
  Owner owner;
  Events events;
  {
    const auto watch = StopWatch::start(owner.pid(), events.callback());
    ASSERT_TRUE(watch.ok());
  }
  EXPECT_TRUE(events.wait_for(0).empty());
}

}  // namespace
}  // namespace drover::link
