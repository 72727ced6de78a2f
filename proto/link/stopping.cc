#include "link/stopping.h"

#include <poll.h>
#include <signal.h>
#include <sys/eventfd.h>
#include <sys/signalfd.h>
#include <sys/syscall.h>
#include <unistd.h>

#include <array>
#include <cerrno>
#include <cstring>
#include <thread>
#include <utility>

#include "absl/strings/str_cat.h"

namespace drover::link {
namespace {

sigset_t stop_signals() {
  sigset_t set;
  sigemptyset(&set);
  for (const int signal : {SIGTERM, SIGINT, SIGHUP}) sigaddset(&set, signal);
  return set;
}

// A descriptor that is closed with it.
class Descriptor {
 public:
  explicit Descriptor(int value = -1) : value_(value) {}
  Descriptor(Descriptor&& other) noexcept : value_(std::exchange(other.value_, -1)) {}
  Descriptor& operator=(Descriptor&& other) noexcept {
    std::swap(value_, other.value_);
    return *this;
  }
  ~Descriptor() {
    if (value_ >= 0) close(value_);
  }
  int get() const { return value_; }

 private:
  int value_;
};

class RealStopWatch final : public StopWatch {
 public:
  RealStopWatch(Descriptor signals, Descriptor owner, Descriptor ended, Callback stop)
      : signals_(std::move(signals)), owner_(std::move(owner)), ended_(std::move(ended)), stop_(std::move(stop)),
        thread_([this] { watch(); }) {}

  ~RealStopWatch() override {
    const std::uint64_t one = 1;
    while (write(ended_.get(), &one, sizeof(one)) < 0 && errno == EINTR) {
    }
  }

 private:
  void watch() {
    // A negative descriptor is passed over by poll.
    std::array<pollfd, 3> all = {{{signals_.get(), POLLIN, 0}, {owner_.get(), POLLIN, 0}, {ended_.get(), POLLIN, 0}}};
    int count = 0;
    while (true) {
      if (poll(all.data(), all.size(), -1) < 0) continue;
      if (all[2].revents != 0) return;
      if (all[0].revents != 0) {
        signalfd_siginfo info{};
        if (read(signals_.get(), &info, sizeof(info)) == sizeof(info)) stop_(StopCause::kSignal, ++count);
      }
      if (all[1].revents != 0) {
        all[1].fd = -1;
        stop_(StopCause::kOwnerGone, ++count);
      }
    }
  }

  Descriptor signals_, owner_, ended_;
  Callback stop_;
  std::jthread thread_;  // last: it uses all of the above
};

absl::Status errno_status(const char* what) {
  return absl::InternalError(absl::StrCat(what, ": ", std::strerror(errno)));
}

}  // namespace

void block_signals() {
  const sigset_t set = stop_signals();
  pthread_sigmask(SIG_BLOCK, &set, nullptr);
  struct sigaction ignore {};
  ignore.sa_handler = SIG_IGN;
  sigaction(SIGPIPE, &ignore, nullptr);
}

absl::StatusOr<std::unique_ptr<StopWatch>> StopWatch::start(pid_t owner, Callback stop) {
  const sigset_t set = stop_signals();
  Descriptor signals(signalfd(-1, &set, SFD_CLOEXEC));
  if (signals.get() < 0) return errno_status("signalfd");
  Descriptor watched;
  if (owner > 0) {
    watched = Descriptor(static_cast<int>(syscall(SYS_pidfd_open, owner, 0)));
    if (watched.get() < 0) {
      return absl::FailedPreconditionError(absl::StrCat("process ", owner, " cannot be watched: ", std::strerror(errno)));
    }
  }
  Descriptor ended(eventfd(0, EFD_CLOEXEC));
  if (ended.get() < 0) return errno_status("eventfd");
  return std::make_unique<RealStopWatch>(std::move(signals), std::move(watched), std::move(ended), std::move(stop));
}

}  // namespace drover::link
