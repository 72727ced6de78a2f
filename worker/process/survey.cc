#include "process/survey.h"

#include <fcntl.h>
#include <unistd.h>

#include "absl/strings/str_cat.h"
#include "status/try.h"

namespace drover::process {
namespace {

// Whether somebody holds the lock, without taking it: a runner that starts at this moment must not find it taken. A
// file that is not there is held by nobody.
bool is_locked(const std::string& path) {
  const int file = open(path.c_str(), O_RDWR | O_CLOEXEC | O_NOFOLLOW);
  if (file < 0) return false;
  struct flock whole {};
  whole.l_type = F_WRLCK;
  whole.l_whence = SEEK_SET;
  const bool asked = fcntl(file, F_OFD_GETLK, &whole) == 0;
  close(file);
  return asked && whole.l_type != F_UNLCK;
}

absl::Status in_file(const absl::Status& status, const std::string& path) {
  return status.ok() ? status : absl::Status(status.code(), absl::StrCat(path, ": ", status.message()));
}

}  // namespace

absl::StatusOr<Survey> survey(const Files& files, const std::string& folder, const std::string& boot_id) {
  const auto path = [&](const char* name) { return absl::StrCat(folder, "/", name); };
  Survey seen;
  if (files.exists(path(kBegunFile))) {
    DROVER_ASSIGN(const std::string text, files.read(path(kBegunFile)));
    const absl::StatusOr<Begun> begun = parse_begun(text);
    DROVER_TRY(in_file(begun.status(), path(kBegunFile)));
    seen.begun = *begun;
  }
  if (files.exists(path(kEndedFile))) {
    DROVER_ASSIGN(const std::string text, files.read(path(kEndedFile)));
    const absl::StatusOr<Ended> ended = parse_ended(text);
    DROVER_TRY(in_file(ended.status(), path(kEndedFile)));
    seen.ended = *ended;
  }
  if (files.exists(path(kReceiptFile))) {
    seen.found = Found::kDelivered;
  } else if (files.exists(path(kReportFile))) {
    seen.found = Found::kReported;
  } else if (seen.ended) {
    seen.found = Found::kEnded;
  } else if (is_locked(path(kWatchFile))) {
    seen.found = Found::kRunning;  // before its `begun` is there, too
  } else if (!seen.begun) {
    seen.found = Found::kOrdered;
  } else if (seen.begun->boot_id != boot_id) {
    seen.found = Found::kRebooted;
  } else if (is_alive(seen.begun->child) || is_locked(path(kAliveFile))) {
    seen.found = Found::kUnwatched;
  } else {
    seen.found = Found::kUnknown;
  }
  return seen;
}

}  // namespace drover::process
