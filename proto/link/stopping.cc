#include "link/stopping.h"

#include <poll.h>
#include <pthread.h>
#include <sys/eventfd.h>
#include <sys/signalfd.h>
#include <sys/syscall.h>
#include <unistd.h>

#include <array>
#include <cerrno>
#include <csignal>
#include <cstdint>
#include <cstring>
#include <fstream>
#include <iterator>
#include <optional>
#include <string>
#include <thread>
#include <utility>

#include "absl/strings/str_cat.h"
#include "link/clock.h"

namespace drover::link {
namespace {

constexpr int kOwnerPollMs = 500;  // only where the kernel has no pidfd

sigset_t stop_signals() {
  sigset_t set;
  sigemptyset(&set);
  for (const int signal : {SIGTERM, SIGINT, SIGHUP}) sigaddset(&set, signal);
  return set;
}

// Field 22 of /proc/PID/stat; empty: there is no such process, or it has ended and waits to be reaped. The name in
// brackets may hold anything, so counting starts behind the last bracket.
std::string start_time_of(pid_t process) {
  std::ifstream file(absl::StrCat("/proc/", process, "/stat"));
  const std::string text{std::istreambuf_iterator<char>(file), {}};
  const std::size_t bracket = text.rfind(')');
  if (bracket == std::string::npos || text.compare(bracket, 4, ") Z ") == 0) return "";
  std::size_t begin = bracket + 2;
  for (int field = 3; field < 22 && begin != std::string::npos; ++field) begin = text.find(' ', begin) + 1;
  return text.substr(begin, text.find(' ', begin) - begin);
}

absl::Status errno_status(const char* what) {
  return absl::InternalError(absl::StrCat(what, ": ", std::strerror(errno)));
}

class Descriptor {
 public:
  Descriptor() = default;
  Descriptor(const Descriptor&) = delete;
  Descriptor& operator=(const Descriptor&) = delete;
  ~Descriptor() { reset(-1); }
  void reset(int descriptor) {
    if (descriptor_ >= 0) close(descriptor_);
    descriptor_ = descriptor;
  }
  int get() const { return descriptor_; }

 private:
  int descriptor_ = -1;
};

class SignalWatch final : public StopWatch {
 public:
  SignalWatch(pid_t owner, Callback stop, absl::Duration together)
      : owner_(owner), stop_(std::move(stop)), together_(together) {}
  SignalWatch(const SignalWatch&) = delete;
  SignalWatch& operator=(const SignalWatch&) = delete;
  ~SignalWatch() override {
    if (!thread_.joinable()) return;
    const std::uint64_t one = 1;
    if (write(end_.get(), &one, sizeof one) == sizeof one) thread_.join();
  }

  absl::Status start() {
    const sigset_t set = stop_signals();
    signals_.reset(signalfd(-1, &set, SFD_CLOEXEC | SFD_NONBLOCK));
    if (signals_.get() < 0) return errno_status("signalfd");
    end_.reset(eventfd(0, EFD_CLOEXEC));
    if (end_.get() < 0) return errno_status("eventfd");
    if (owner_ > 0) owner_start_ = start_time_of(owner_);
    if (owner_ > 0) owner_fd_.reset(static_cast<int>(syscall(SYS_pidfd_open, owner_, 0)));
    thread_ = std::thread([this] { watch(); });
    return absl::OkStatus();
  }

 private:
  void say(StopCause cause) { stop_(cause, ++count_); }

  bool owner_gone(bool readable) const {
    return owner_start_.empty() || readable || (owner_fd_.get() < 0 && start_time_of(owner_) != owner_start_);
  }

  void take_signals() {
    signalfd_siginfo info{};
    while (read(signals_.get(), &info, sizeof info) == sizeof info) {
      const absl::Duration now = clock_.steady();
      if (signalled_ && now - *signalled_ < together_) continue;
      signalled_ = now;
      say(StopCause::kSignal);
    }
  }

  void watch() {
    bool watching_owner = owner_ > 0;
    for (;;) {
      std::array<pollfd, 3> waiting = {
          {{end_.get(), POLLIN, 0}, {signals_.get(), POLLIN, 0}, {watching_owner ? owner_fd_.get() : -1, POLLIN, 0}}};
      const bool by_hand = watching_owner && (owner_fd_.get() < 0 || owner_start_.empty());
      if (poll(waiting.data(), waiting.size(), by_hand ? kOwnerPollMs : -1) < 0 && errno != EINTR) return;
      if (waiting[0].revents != 0) return;
      if (waiting[1].revents != 0) take_signals();
      if (watching_owner && owner_gone(waiting[2].revents != 0)) {
        watching_owner = false;
        if (!signalled_) say(StopCause::kOwnerGone);
      }
    }
  }

  const pid_t owner_;
  const Callback stop_;
  const absl::Duration together_;
  const RealClock clock_;
  std::optional<absl::Duration> signalled_;  // when the last counted signal came
  std::string owner_start_;
  int count_ = 0;
  Descriptor signals_, end_, owner_fd_;
  std::thread thread_;
};

}  // namespace

void block_signals() {
  const sigset_t set = stop_signals();
  pthread_sigmask(SIG_BLOCK, &set, nullptr);
  std::signal(SIGPIPE, SIG_IGN);
}

absl::StatusOr<std::unique_ptr<StopWatch>> StopWatch::start(pid_t owner, Callback stop, absl::Duration together) {
  auto watch = std::make_unique<SignalWatch>(owner, std::move(stop), together);
  if (absl::Status status = watch->start(); !status.ok()) return status;
  return watch;
}

}  // namespace drover::link
