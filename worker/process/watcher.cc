#include "process/watcher.h"

#include <sys/epoll.h>
#include <sys/eventfd.h>
#include <sys/syscall.h>
#include <sys/wait.h>
#include <unistd.h>

#include <array>
#include <cerrno>
#include <cstring>
#include <map>
#include <mutex>
#include <thread>
#include <utility>

#include "absl/strings/str_cat.h"

namespace drover::process {
namespace {

absl::Status errno_status(const std::string& what) {
  const int error = errno;
  const std::string text = absl::StrCat(what, ": ", std::strerror(error));
  return error == ESRCH ? absl::NotFoundError(text) : absl::UnavailableError(text);
}

constexpr std::uint64_t kWake = 0;

// Entries have numbers of their own. A pidfd's number comes again as soon as it is closed, and an event of the old one
// may still come then: a child that is being spawned holds copies of our descriptors until its exec, so that closing
// one does not take it out of the epoll set.
class EpollWatcher final : public Watcher {
 public:
  EpollWatcher(int epoll, int wake) : epoll_(epoll), wake_(wake), thread_([this] { loop(); }) {}

  ~EpollWatcher() override {
    const std::uint64_t one = 1;
    while (write(wake_, &one, sizeof(one)) < 0 && errno == EINTR) {
    }
    thread_.join();
    for (const auto& [number, entry] : watched_) close(entry.file);
    close(epoll_);
    close(wake_);
  }

  absl::Status add(pid_t pid, std::function<void()> gone) override {
    const int file = static_cast<int>(syscall(SYS_pidfd_open, pid, 0));
    if (file < 0) return errno_status(absl::StrCat("process ", pid));
    const std::lock_guard lock(mutex_);
    const std::uint64_t number = ++last_number_;
    watched_[number] = {file, pid, std::move(gone)};
    epoll_event event{.events = EPOLLIN, .data = {.u64 = number}};
    if (epoll_ctl(epoll_, EPOLL_CTL_ADD, file, &event) == 0) return absl::OkStatus();
    const absl::Status failed = errno_status("epoll");
    watched_.erase(number);
    close(file);
    return failed;
  }

 private:
  struct Entry {
    int file = -1;
    pid_t pid = 0;
    std::function<void()> gone;
  };

  void loop() {
    std::array<epoll_event, 16> events{};
    while (true) {
      const int count = epoll_wait(epoll_, events.data(), static_cast<int>(events.size()), -1);
      for (int i = 0; i < count; ++i) {
        const std::uint64_t number = events[static_cast<std::size_t>(i)].data.u64;
        if (number == kWake) return;
        ended(number);
      }
    }
  }

  void ended(std::uint64_t number) {
    Entry entry;
    {
      const std::lock_guard lock(mutex_);
      const auto at = watched_.find(number);
      if (at == watched_.end()) return;
      entry = std::move(at->second);
      watched_.erase(at);
    }
    epoll_ctl(epoll_, EPOLL_CTL_DEL, entry.file, nullptr);
    close(entry.file);
    waitpid(entry.pid, nullptr, WNOHANG);
    entry.gone();
  }

  int epoll_, wake_;
  std::mutex mutex_;
  std::uint64_t last_number_ = kWake;
  std::map<std::uint64_t, Entry> watched_;
  std::thread thread_;  // last: it uses all of the above
};

}  // namespace

absl::StatusOr<std::unique_ptr<Watcher>> Watcher::start() {
  const int epoll = epoll_create1(EPOLL_CLOEXEC);
  if (epoll < 0) return errno_status("epoll");
  const int wake = eventfd(0, EFD_CLOEXEC);
  epoll_event event{.events = EPOLLIN, .data = {.u64 = kWake}};
  if (wake < 0 || epoll_ctl(epoll, EPOLL_CTL_ADD, wake, &event) != 0) {
    const absl::Status failed = errno_status("eventfd");
    if (wake >= 0) close(wake);
    close(epoll);
    return failed;
  }
  return std::make_unique<EpollWatcher>(epoll, wake);
}

}  // namespace drover::process
