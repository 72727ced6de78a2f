#include "process/attempt_folder.h"

#include <map>
#include <vector>

#include "absl/strings/numbers.h"
#include "absl/strings/str_cat.h"
#include "absl/strings/str_split.h"
#include "absl/strings/strip.h"
#include "status/try.h"

namespace drover::process {
namespace {

// A record of the runner (worker/runner/record.h).
class Fields {
 public:
  static absl::StatusOr<Fields> parse(std::string_view text) {
    Fields fields;
    bool whole = false;
    const std::vector<std::string> lines = absl::StrSplit(absl::string_view(text.data(), text.size()), '\n');
    for (const std::string& line : lines) {
      if (whole && !line.empty()) return absl::InvalidArgumentError("the record goes on after its end");
      const std::pair<std::string, std::string> field = absl::StrSplit(line, absl::MaxSplits(' ', 1));
      if (field.first == "end") {
        whole = true;
      } else if (!line.empty()) {
        fields.values_[field.first] = field.second;
      }
    }
    if (!whole) return absl::InvalidArgumentError("the record is not whole");
    DROVER_ASSIGN(const std::int64_t format, fields.number("format"));
    if (format != 1) return absl::InvalidArgumentError(absl::StrCat("the record has format ", format, ", 1 is known"));
    return fields;
  }

  absl::StatusOr<std::int64_t> number(const std::string& key) const {
    std::int64_t value = 0;
    const auto at = values_.find(key);
    if (at != values_.end() && absl::SimpleAtoi(at->second, &value)) return value;
    return absl::InvalidArgumentError(absl::StrCat("the record has no number ", key));
  }
  bool has(const std::string& key) const { return values_.contains(key); }
  std::string text(const std::string& key) const {
    const auto at = values_.find(key);
    return at == values_.end() ? std::string() : at->second;
  }

 private:
  std::map<std::string, std::string> values_;
};

absl::StatusOr<ProcessIdentity> identity_of(const Fields& fields, const std::string& who) {
  DROVER_ASSIGN(const std::int64_t pid, fields.number(absl::StrCat(who, "_pid")));
  DROVER_ASSIGN(const std::int64_t start, fields.number(absl::StrCat(who, "_start")));
  return ProcessIdentity{static_cast<pid_t>(pid), static_cast<std::uint64_t>(start)};
}

absl::StatusOr<Ended::Cause> cause_of(const std::string& word) {
  static const std::map<std::string, Ended::Cause> kWords = {{"exited", Ended::Cause::kExited},
                                                             {"limit", Ended::Cause::kLimit},
                                                             {"stopped", Ended::Cause::kStopped},
                                                             {"launch-failed", Ended::Cause::kLaunchFailed}};
  const auto at = kWords.find(word);
  if (at == kWords.end())
    return absl::InvalidArgumentError(absl::StrCat("the record has an unknown cause \"", word, "\""));
  return at->second;
}

}  // namespace

absl::StatusOr<Begun> parse_begun(std::string_view text) {
  DROVER_ASSIGN(const Fields fields, Fields::parse(text));
  Begun begun;
  begun.boot_id = fields.text("boot_id");
  DROVER_ASSIGN(begun.run, fields.number("run"));
  DROVER_ASSIGN(begun.fence, fields.number("fence"));
  DROVER_ASSIGN(begun.runner, identity_of(fields, "runner"));
  DROVER_ASSIGN(begun.child, identity_of(fields, "child"));
  DROVER_ASSIGN(const std::int64_t time_us, fields.number("time_us"));
  begun.time = absl::FromUnixMicros(time_us);
  return begun;
}

absl::StatusOr<Ended> parse_ended(std::string_view text) {
  DROVER_ASSIGN(const Fields fields, Fields::parse(text));
  Ended ended;
  DROVER_ASSIGN(ended.cause, cause_of(fields.text("cause")));
  if (fields.has("exit_code")) {
    DROVER_ASSIGN(const std::int64_t code, fields.number("exit_code"));
    ended.exit_code = static_cast<int>(code);
  }
  if (fields.has("signal")) {
    DROVER_ASSIGN(const std::int64_t signal, fields.number("signal"));
    ended.signal = static_cast<int>(signal);
  }
  DROVER_ASSIGN(const std::int64_t launch_errno, fields.number("launch_errno"));
  ended.launch_errno = static_cast<int>(launch_errno);
  DROVER_ASSIGN(const std::int64_t killed, fields.number("killed_by_us"));
  DROVER_ASSIGN(const std::int64_t unkillable, fields.number("unkillable"));
  ended.killed_by_us = killed != 0;
  ended.unkillable = unkillable != 0;
  DROVER_ASSIGN(const std::int64_t wall_us, fields.number("wall_us"));
  DROVER_ASSIGN(const std::int64_t user_us, fields.number("user_us"));
  DROVER_ASSIGN(const std::int64_t system_us, fields.number("system_us"));
  ended.wall = absl::Microseconds(wall_us);
  ended.user_cpu = absl::Microseconds(user_us);
  ended.system_cpu = absl::Microseconds(system_us);
  DROVER_ASSIGN(ended.peak_memory_bytes, fields.number("peak_memory_bytes"));
  return ended;
}

}  // namespace drover::process
