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

class EpollWatcher final : public Watcher {
 public:
  EpollWatcher(int epoll, int wake) : epoll_(epoll), wake_(wake), thread_([this] { loop(); }) {}

  ~EpollWatcher() override {
    const std::uint64_t one = 1;
    while (write(wake_, &one, sizeof(one)) < 0 && errno == EINTR) {
    }
    thread_.join();
    for (const auto& [file, entry] : watched_) close(file);
    close(epoll_);
    close(wake_);
  }

  absl::Status add(pid_t pid, std::function<void()> gone) override {
    const int file = static_cast<int>(syscall(SYS_pidfd_open, pid, 0));
    if (file < 0) return errno_status(absl::StrCat("process ", pid));
    const std::lock_guard lock(mutex_);
    watched_[file] = {pid, std::move(gone)};
    epoll_event event{.events = EPOLLIN, .data = {.fd = file}};
    if (epoll_ctl(epoll_, EPOLL_CTL_ADD, file, &event) == 0) return absl::OkStatus();
    const absl::Status failed = errno_status("epoll");
    watched_.erase(file);
    close(file);
    return failed;
  }

 private:
  struct Entry {
    pid_t pid = 0;
    std::function<void()> gone;
  };

  void loop() {
    std::array<epoll_event, 16> events{};
    while (true) {
      const int count = epoll_wait(epoll_, events.data(), static_cast<int>(events.size()), -1);
      for (int i = 0; i < count; ++i) {
        const int file = events[static_cast<std::size_t>(i)].data.fd;
        if (file == wake_) return;
        ended(file);
      }
    }
  }

  void ended(int file) {
    Entry entry;
    {
      const std::lock_guard lock(mutex_);
      const auto at = watched_.find(file);
      if (at == watched_.end()) return;
      entry = std::move(at->second);
      watched_.erase(at);
    }
    close(file);  // takes it out of the epoll set, too
    waitpid(entry.pid, nullptr, WNOHANG);
    entry.gone();
  }

  int epoll_, wake_;
  std::mutex mutex_;
  std::map<int, Entry> watched_;  // by pidfd
  std::thread thread_;            // last: it uses all of the above
};

}  // namespace

absl::StatusOr<std::unique_ptr<Watcher>> Watcher::start() {
  const int epoll = epoll_create1(EPOLL_CLOEXEC);
  if (epoll < 0) return errno_status("epoll");
  const int wake = eventfd(0, EFD_CLOEXEC);
  epoll_event event{.events = EPOLLIN, .data = {.fd = wake}};
  if (wake < 0 || epoll_ctl(epoll, EPOLL_CTL_ADD, wake, &event) != 0) {
    const absl::Status failed = errno_status("eventfd");
    if (wake >= 0) close(wake);
    close(epoll);
    return failed;
  }
  return std::make_unique<EpollWatcher>(epoll, wake);
}

}  // namespace drover::process
