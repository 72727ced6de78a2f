#include "process/survey.h"

#include <fcntl.h>
#include <unistd.h>

#include <cerrno>
#include <cstring>
#include <string_view>
#include <utility>

#include "absl/strings/str_cat.h"
#include "status/try.h"

namespace drover::process {
namespace {

absl::Status in_file(const absl::Status& status, const std::string& path) {
  return status.ok() ? status : absl::Status(status.code(), absl::StrCat(path, ": ", status.message()));
}

absl::Status errno_status(const std::string& path) {
  return absl::UnavailableError(absl::StrCat(path, ": ", std::strerror(errno)));
}

// Whether somebody holds the lock, without taking it: a runner that starts at this moment must not find it taken. A
// file that is not there is held by nobody; one that cannot be asked (no descriptors left, say) is no evidence at all.
absl::StatusOr<bool> is_locked(const std::string& path) {
  const int file = open(path.c_str(), O_RDWR | O_CLOEXEC | O_NOFOLLOW);
  if (file < 0 && errno == ENOENT) return false;
  if (file < 0) return errno_status(path);
  struct flock whole {};
  whole.l_type = F_WRLCK;
  whole.l_whence = SEEK_SET;
  const absl::Status asked = fcntl(file, F_OFD_GETLK, &whole) == 0 ? absl::OkStatus() : errno_status(path);
  close(file);
  DROVER_TRY(asked);
  return whole.l_type != F_UNLCK;
}

// The record under `path`, where there is one.
template <class Record>
absl::Status read_record(const Files& files, const std::string& path, absl::StatusOr<Record> (*parse)(std::string_view),
                         std::optional<Record>& record) {
  const absl::StatusOr<std::string> text = files.read(path);
  if (absl::IsNotFound(text.status())) return absl::OkStatus();
  DROVER_TRY(text.status());
  absl::StatusOr<Record> parsed = parse(*text);
  DROVER_TRY(in_file(parsed.status(), path));
  record = *std::move(parsed);
  return absl::OkStatus();
}

absl::Status read_records(const Files& files, const std::string& folder, Survey& seen) {
  DROVER_TRY(read_record(files, absl::StrCat(folder, "/", kBegunFile), parse_begun, seen.begun));
  return read_record(files, absl::StrCat(folder, "/", kEndedFile), parse_ended, seen.ended);
}

// Where the runner's records do not end the matter. `watched`: its lock is held.
absl::StatusOr<Found> without_an_end(const Survey& seen, const std::string& folder, const std::string& boot_id,
                                     bool watched) {
  if (watched) return Found::kRunning;  // before its `begun` is there, too
  if (!seen.begun) return Found::kOrdered;
  if (seen.begun->boot_id != boot_id) return Found::kRebooted;
  if (is_alive(seen.begun->runner)) return Found::kRunning;
  if (is_alive(seen.begun->child)) return Found::kUnwatched;
  DROVER_ASSIGN(const bool descendants, is_locked(absl::StrCat(folder, "/", kAliveFile)));
  return descendants ? Found::kUnwatched : Found::kUnknown;
}

}  // namespace

absl::StatusOr<Survey> survey(const Files& files, const std::string& folder, const std::string& boot_id) {
  const auto path = [&](const char* name) { return absl::StrCat(folder, "/", name); };
  Survey seen;
  DROVER_TRY(read_records(files, folder, seen));
  if (!seen.ended) {
    DROVER_ASSIGN(const bool watched, is_locked(path(kWatchFile)));
    // A runner may write its last record and go between the two looks. What is read after its lock was seen free is
    // final.
    if (!watched) DROVER_TRY(read_records(files, folder, seen));
    if (!seen.ended) {
      DROVER_ASSIGN(seen.found, without_an_end(seen, folder, boot_id, watched));
    }
  }
  if (seen.ended) seen.found = Found::kEnded;
  if (files.exists(path(kReportFile))) seen.found = Found::kReported;
  if (files.exists(path(kReceiptFile))) seen.found = Found::kDelivered;
  return seen;
}

}  // namespace drover::process
