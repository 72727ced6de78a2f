#include "session/endings.h"

#include <cstddef>
#include <cstring>

#include "absl/strings/str_cat.h"
#include "link/text.h"

namespace drover::session {
namespace {

constexpr std::size_t kReasonBytes = 4 << 10;  // limits of the contract
constexpr std::size_t kTailBytes = 64 << 10;

void keep_end(std::string& text) {
  if (text.size() > kTailBytes) text.erase(0, text.size() - kTailBytes);
}

// At most so many bytes, not ending within a symbol.
std::string cut(const std::string& text, std::size_t most) {
  std::string clean = link::clean_utf8(text);
  if (clean.size() <= most) return clean;
  std::size_t end = most;
  while (end > 0 && (static_cast<unsigned char>(clean[end]) & 0xC0u) == 0x80u) --end;
  return clean.substr(0, end);
}

}  // namespace

v1::AttemptReport lost(v1::LossReason why, const std::string& reason) {
  v1::AttemptReport report;
  report.set_ending(v1::ENDING_LOST);
  report.set_loss(why);
  report.set_reason(link::clean_utf8(reason));
  return report;
}

v1::AttemptReport not_begun(const std::string& reason) {
  v1::AttemptReport report;
  report.set_ending(v1::ENDING_NOT_BEGUN);
  report.set_reason(link::clean_utf8(reason));
  return report;
}

v1::AttemptReport stopped(const std::string& reason) {
  v1::AttemptReport report;
  report.set_ending(v1::ENDING_STOPPED);
  report.set_reason(link::clean_utf8(reason));
  return report;
}

code::HowItEnded how_it_ended(const process::Survey& found) {
  using Cause = process::Ended::Cause;
  const process::Ended& ended = *found.ended;
  code::HowItEnded how;
  if (ended.cause == Cause::kLaunchFailed) {
    how.launch_failure = absl::StrCat("the program could not be started: ", std::strerror(ended.launch_errno));
  }
  how.limit = ended.cause == Cause::kLimit;
  how.stopped = ended.cause == Cause::kStopped;
  how.exit_code = ended.exit_code;
  how.signal = ended.signal;
  how.killed_by_us = ended.killed_by_us;
  how.unkillable = ended.unkillable;
  how.wall = ended.wall;
  how.user_cpu = ended.user_cpu;
  how.system_cpu = ended.system_cpu;
  how.peak_memory_bytes = ended.peak_memory_bytes;
  if (found.begun) how.begun = found.begun->time;
  return how;
}

void fit(v1::AttemptReport& report) {
  report.set_reason(cut(report.reason(), kReasonBytes));
  keep_end(*report.mutable_stdout_tail());
  keep_end(*report.mutable_stderr_tail());
}

}  // namespace drover::session
