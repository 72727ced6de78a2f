#include "commands/daemon.h"

#include <signal.h>
#include <sys/wait.h>

#include <chrono>
#include <thread>
#include <utility>

#include "absl/strings/str_cat.h"

namespace drover::commands {
namespace {

constexpr int kWrongInput = 2;       // exit code of all our programs
constexpr int kMostWrongInputs = 3;  // repetition seldom cures it, but a predecessor may still have been ending

}  // namespace

Daemon::Daemon(std::string name, ProgramCall call, std::uint64_t seed)
    : name_(std::move(name)), call_(std::move(call)), backoff_(seed, absl::Milliseconds(300), absl::Seconds(10)) {}

Daemon::~Daemon() {
  if (child_ <= 0) return;
  kill(child_, SIGKILL);
  waitpid(child_, nullptr, 0);
}

void Daemon::reap(absl::Duration now) {
  if (child_ <= 0) return;
  const std::optional<ProcessEnd> end = process_end(child_);
  if (!end.has_value()) return;
  child_ = 0;
  last_end_ = *end;
  const bool quick = now - started_ < kQuick;
  if (!quick) backoff_.reset();
  quick_ends_ = quick ? quick_ends_ + 1 : 0;
  hopeless_ = quick_ends_ >= (end->exit_code == kWrongInput ? kMostWrongInputs : kMostQuickEnds);
  not_before_ = now + backoff_.next();
  news_ = absl::StrCat(name_, " ended by itself (", end->text(), "); it is started again");
}

absl::Status Daemon::tend(absl::Duration now) {
  reap(now);
  if (hopeless_) {
    const std::string tail = log_tail(call_.log);
    return absl::AbortedError(absl::StrCat(name_, " does not run: it ended with ", last_end_.text(),
                                           quick_ends_ > 1 ? absl::StrCat(", ", quick_ends_, " times in a row") : "",
                                           "; its log ", call_.log, tail.empty() ? " is empty" : " ends with\n", tail));
  }
  if (child_ > 0 || now < not_before_) return absl::OkStatus();
  const absl::StatusOr<pid_t> child = start_process(call_);
  if (!child.ok()) return child.status();
  child_ = *child;
  started_ = now;
  return absl::OkStatus();
}

std::string Daemon::take_news() { return std::exchange(news_, ""); }

void Daemon::end(const link::Clock& clock) {
  if (child_ <= 0) return;
  kill(child_, SIGTERM);
  const absl::Duration limit = clock.steady() + kEndGrace;
  while (!process_end(child_).has_value()) {
    if (clock.steady() > limit) {
      kill(child_, SIGKILL);
      waitpid(child_, nullptr, 0);
      break;
    }
    std::this_thread::sleep_for(std::chrono::milliseconds(20));
  }
  child_ = 0;
}

}  // namespace drover::commands
