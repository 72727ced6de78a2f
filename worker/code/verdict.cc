#include "code/verdict.h"

#include <fcntl.h>
#include <signal.h>
#include <sys/stat.h>
#include <unistd.h>

#include <algorithm>
#include <cstring>
#include <set>
#include <vector>

#include "absl/strings/str_cat.h"
#include "code/reader.h"

namespace drover::code {
namespace {

constexpr std::size_t kTailBytes = 64 << 10;
constexpr std::size_t kReasonBytes = 4 << 10;
constexpr double kNearLimit = 0.9;  // share of the memory declared from which on a SIGKILL is the kernel's

std::string tail_of(const std::string& path) {
  const int file = open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NOFOLLOW | O_NONBLOCK);
  if (file < 0) return {};
  struct stat info {};
  std::string tail;
  if (fstat(file, &info) == 0 && S_ISREG(info.st_mode)) {
    const auto size = static_cast<std::size_t>(info.st_size);
    tail.resize(std::min(size, kTailBytes));
    const ssize_t got = pread(file, tail.data(), tail.size(), static_cast<off_t>(size - tail.size()));
    tail.resize(got > 0 ? static_cast<std::size_t>(got) : 0);
  }
  close(file);
  return tail;
}

void set(google::protobuf::Duration& span, absl::Duration value) {
  span.set_seconds(absl::IDivDuration(value, absl::Seconds(1), &value));
  span.set_nanos(static_cast<std::int32_t>(absl::IDivDuration(value, absl::Nanoseconds(1), &value)));
}

void fail(v1::AttemptReport& report, v1::FailureKind kind, std::string reason) {
  report.set_ending(v1::ENDING_FAILED);
  report.set_failure(kind);
  report.set_reason(reason.substr(0, kReasonBytes));
}

void lose(v1::AttemptReport& report, v1::LossReason loss, std::string reason) {
  report.set_ending(v1::ENDING_LOST);
  report.set_loss(loss);
  report.set_reason(reason.substr(0, kReasonBytes));
}

bool near_memory_limit(const Definition& definition, const HowItEnded& how) {
  const std::int64_t machine = static_cast<std::int64_t>(sysconf(_SC_PHYS_PAGES)) * sysconf(_SC_PAGESIZE);
  const std::int64_t limit = definition.memory_bytes > 0 ? std::min(definition.memory_bytes, machine) : machine;
  return static_cast<double>(how.peak_memory_bytes) >= kNearLimit * static_cast<double>(limit);
}

void judge_signal(v1::AttemptReport& report, const Definition& definition, const HowItEnded& how) {
  report.set_abnormal(true);
  if (*how.signal != SIGKILL) {
    return fail(report, v1::FAILURE_KIND_SIGNAL,
                absl::StrCat("the code crashed: signal ", *how.signal, " (", strsignal(*how.signal), ")"));
  }
  if (near_memory_limit(definition, how)) {
    return fail(report, v1::FAILURE_KIND_MEMORY,
                absl::StrCat("the code was killed for memory; it had ", how.peak_memory_bytes >> 20, " MiB"));
  }
  lose(report, v1::LOSS_REASON_KILLED_FROM_OUTSIDE, "the code was killed by SIGKILL, and not by its runner");
}

// The first text of `absent` in the files that outputs are read from, then in stdout and stderr.
FoundText forbidden_text(const Definition& definition, const std::string& work, const std::string& stdout_path,
                         const std::string& stderr_path, std::string& where) {
  if (definition.absent.empty()) return {};
  std::vector<std::pair<std::string, std::string>> files;  // shown name, path
  std::set<std::string> seen;
  for (const OutputReader& output : definition.outputs) {
    if (seen.insert(output.file).second) files.emplace_back(output.file, absl::StrCat(work, "/", output.file));
  }
  files.emplace_back("its standard output", stdout_path);
  files.emplace_back("its standard error", stderr_path);
  for (const auto& [name, path] : files) {
    FoundText found = find_text(path, definition.absent);
    where = name;
    if (found.found) return found;
  }
  return {};
}

void read_outputs(v1::AttemptReport& report, const Definition& definition, const HowItEnded& how,
                  const std::string& work) {
  for (const OutputReader& output : definition.outputs) {
    const absl::StatusOr<double> value = read_output(output, work, how.begun);
    if (!value.ok()) {
      report.clear_outputs();
      return fail(report, v1::FAILURE_KIND_CODE, absl::StrCat("output ", output.name, ": ", value.status().message()));
    }
    v1::OutputValue& read = *report.add_outputs();
    read.set_name(output.name);
    read.set_value(*value);
  }
  report.set_ending(v1::ENDING_EVALUATED);
}

void judge_exit(v1::AttemptReport& report, const Definition& definition, const HowItEnded& how, const std::string& work,
                const std::string& stdout_path, const std::string& stderr_path) {
  const int code = how.exit_code.value_or(-1);
  std::string where;
  const FoundText found = forbidden_text(definition, work, stdout_path, stderr_path, where);
  const std::string said =
      found.found ? absl::StrCat("\"", found.line_text, "\" (line ", found.line, " of ", where, ")") : "";
  const auto& healthy = definition.healthy_exit_codes;
  if (std::find(healthy.begin(), healthy.end(), code) == healthy.end()) {
    return fail(report, v1::FAILURE_KIND_CODE,
                said.empty() ? absl::StrCat("the code ended with exit code ", code)
                             : absl::StrCat("the code ended with exit code ", code, ": ", said));
  }
  if (found.found) return fail(report, v1::FAILURE_KIND_CODE, said);
  read_outputs(report, definition, how, work);
}

}  // namespace

v1::AttemptReport judge(const Definition& definition, const HowItEnded& how, const std::string& work,
                        const std::string& stdout_path, const std::string& stderr_path) {
  v1::AttemptReport report;
  v1::Usage& usage = *report.mutable_usage();
  set(*usage.mutable_wall(), how.wall);
  set(*usage.mutable_user_cpu(), how.user_cpu);
  set(*usage.mutable_system_cpu(), how.system_cpu);
  usage.set_peak_memory_bytes(how.peak_memory_bytes);
  if (how.exit_code) usage.set_exit_code(*how.exit_code);
  if (how.signal) usage.set_signal(*how.signal);
  if (!how.seen) {
    lose(report, v1::LOSS_REASON_EXIT_UNKNOWN, "nobody saw the code end");
  } else if (!how.launch_failure.empty()) {
    lose(report, v1::LOSS_REASON_SITE, how.launch_failure);
  } else if (how.stopped) {
    report.set_ending(v1::ENDING_STOPPED);
    report.set_reason("stopped as asked");
  } else if (how.limit) {
    fail(report, v1::FAILURE_KIND_LIMIT,
         absl::StrCat("the code ran into its time limit of ", absl::FormatDuration(definition.time_limit)));
  } else if (how.signal) {
    judge_signal(report, definition, how);
  } else {
    judge_exit(report, definition, how, work, stdout_path, stderr_path);
  }
  if (how.unkillable) report.set_abnormal(true);
  if (report.ending() == v1::ENDING_FAILED || report.ending() == v1::ENDING_LOST) {
    report.set_stdout_tail(tail_of(stdout_path));
    report.set_stderr_tail(tail_of(stderr_path));
  }
  return report;
}

}  // namespace drover::code
