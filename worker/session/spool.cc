#include "session/spool.h"

#include <fcntl.h>
#include <sys/file.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <chrono>
#include <cstring>
#include <filesystem>
#include <optional>
#include <system_error>

#include "absl/strings/numbers.h"
#include "absl/strings/str_cat.h"
#include "absl/strings/str_split.h"
#include "link/text.h"
#include "process/attempt_folder.h"
#include "status/try.h"

namespace drover::session {
namespace {

namespace fs = std::filesystem;

constexpr char kAttempts[] = "/attempts";
constexpr char kIdentity[] = "/identity";

std::string name_of(const Key& key) { return absl::StrCat(key.run, ".", key.fence); }

std::optional<Key> key_named(const std::string& name) {
  const std::vector<std::string> parts = absl::StrSplit(name, '.');
  Key key;
  if (parts.size() != 2 || !absl::SimpleAtoi(parts[0], &key.run) || !absl::SimpleAtoi(parts[1], &key.fence)) {
    return std::nullopt;
  }
  return name_of(key) == name ? std::optional(key) : std::nullopt;
}

template <class Message>
absl::StatusOr<Message> read_message(process::Files& files, const std::string& path) {
  DROVER_ASSIGN(const std::string bytes, files.read(path));
  Message message;
  if (!message.ParseFromString(bytes)) {
    return absl::DataLossError(absl::StrCat(path, " is damaged: it does not read as what it should be"));
  }
  return message;
}

}  // namespace

absl::StatusOr<std::unique_ptr<Spool>> Spool::open(const std::string& folder, process::Files& files) {
  std::unique_ptr<Spool> spool(new Spool(folder, files));
  DROVER_TRY(files.make_folder(folder + kAttempts));
  DROVER_TRY(spool->lock());
  DROVER_TRY(spool->read_identity());
  Identity next = spool->identity_;
  ++next.incarnation;
  DROVER_TRY(spool->write_identity(next));
  return spool;
}

Spool::~Spool() {
  if (lock_ >= 0) close(lock_);
}

absl::Status Spool::lock() {
  const std::string path = folder_ + "/lock";
  lock_ = ::open(path.c_str(), O_RDWR | O_CREAT | O_CLOEXEC | O_NOFOLLOW, 0600);
  if (lock_ < 0) return absl::FailedPreconditionError(absl::StrCat("spool ", path, ": ", std::strerror(errno)));
  if (flock(lock_, LOCK_EX | LOCK_NB) == 0) return absl::OkStatus();
  if (errno != EWOULDBLOCK)
    return absl::FailedPreconditionError(absl::StrCat("spool ", path, ": ", std::strerror(errno)));
  return absl::FailedPreconditionError(
      absl::StrCat("spool ", folder_,
                   " is in use by another worker that runs now; stop that one, or give this one another --spool"));
}

std::string Spool::attempt_folder(const Key& key) const { return absl::StrCat(folder_, kAttempts, "/", name_of(key)); }

std::string Spool::file(const Key& key, const char* name) const { return absl::StrCat(attempt_folder(key), "/", name); }

// Kept as the part of an EnrolRequest that says the same.
absl::Status Spool::read_identity() {
  const std::string path = folder_ + kIdentity;
  if (!files_.exists(path)) return absl::OkStatus();
  DROVER_ASSIGN(const v1::EnrolRequest kept, read_message<v1::EnrolRequest>(files_, path));
  identity_ = {kept.store_id(), kept.term(), kept.incarnation(), kept.newest_receipt()};
  return absl::OkStatus();
}

absl::Status Spool::write_identity(const Identity& identity) {
  v1::EnrolRequest kept;
  kept.set_store_id(identity.store_id);
  kept.set_term(identity.term);
  kept.set_incarnation(identity.incarnation);
  if (identity.newest_receipt.event() > 0) *kept.mutable_newest_receipt() = identity.newest_receipt;
  DROVER_TRY(files_.write_durably(folder_ + kIdentity, kept.SerializeAsString()));
  identity_ = identity;
  return absl::OkStatus();
}

Identity Spool::identity() const {
  const std::lock_guard lock(mutex_);
  return identity_;
}

absl::Status Spool::adopt(const std::string& store_id, std::int64_t term) {
  const std::lock_guard lock(mutex_);
  if (!identity_.store_id.empty() && identity_.store_id != store_id) {
    return absl::FailedPreconditionError(absl::StrCat("this spool belongs to store ", identity_.store_id,
                                                      ", and the coordinator keeps store ", link::printable(store_id),
                                                      "; give this worker another --spool"));
  }
  if (term < identity_.term) {
    return absl::FailedPreconditionError(absl::StrCat("the coordinator speaks in term ", term, ", but term ",
                                                      identity_.term,
                                                      " was seen before: its store was put back from an older copy, or "
                                                      "an old coordinator still runs"));
  }
  if (term == identity_.term && identity_.store_id == store_id) return absl::OkStatus();
  Identity next = identity_;
  next.store_id = store_id;
  next.term = term;
  return write_identity(next);
}

absl::Status Spool::write_order(const v1::Grant& grant) {
  const Key key{grant.run(), grant.fence()};
  DROVER_TRY(files_.make_folder(attempt_folder(key)));
  return files_.write_durably(file(key, process::kOrderFile), grant.SerializeAsString());
}

absl::Status Spool::write_report(const v1::AttemptReport& report) {
  return files_.write_durably(file({report.run(), report.fence()}, process::kReportFile), report.SerializeAsString());
}

absl::Status Spool::write_receipts(const std::vector<v1::Receipt>& receipts) {
  for (const v1::Receipt& receipt : receipts) {
    const std::string path = file({receipt.run(), receipt.fence()}, process::kReceiptFile);
    DROVER_TRY(files_.write_durably(path, receipt.SerializeAsString()));
  }
  const std::lock_guard lock(mutex_);
  Identity next = identity_;
  for (const v1::Receipt& receipt : receipts) {
    if (receipt.event() > next.newest_receipt.event()) next.newest_receipt = receipt;
  }
  if (next.newest_receipt.event() == identity_.newest_receipt.event()) return absl::OkStatus();
  return write_identity(next);
}

absl::StatusOr<v1::Grant> Spool::order(const Key& key) const {
  return read_message<v1::Grant>(files_, file(key, process::kOrderFile));
}

absl::StatusOr<v1::AttemptReport> Spool::report(const Key& key) const {
  return read_message<v1::AttemptReport>(files_, file(key, process::kReportFile));
}

bool Spool::knows(const Key& key) const { return files_.exists(file(key, process::kOrderFile)); }

std::vector<SpoolEntry> Spool::entries() const {
  std::vector<SpoolEntry> entries;
  const absl::StatusOr<std::vector<std::string>> names = files_.list(folder_ + kAttempts);
  if (!names.ok()) return entries;
  for (const std::string& name : *names) {
    const std::optional<Key> key = key_named(name);
    if (!key) continue;
    entries.push_back({*key, files_.exists(file(*key, process::kOrderFile)),
                       files_.exists(file(*key, process::kReportFile)),
                       files_.exists(file(*key, process::kReceiptFile))});
  }
  std::sort(entries.begin(), entries.end(), [](const auto& a, const auto& b) { return a.key < b.key; });
  return entries;
}

absl::Status Spool::remove(const Key& key) {
  DROVER_TRY(files_.remove_tree(file(key, process::kOrderFile)));  // first: without it the rest means nothing
  return files_.remove_tree(attempt_folder(key));
}

int Spool::prune(const Retention& retention, absl::Time now) {
  struct Delivered {
    fs::file_time_type at;
    Key key;
  };
  std::vector<Delivered> delivered;
  for (const SpoolEntry& entry : entries()) {
    std::error_code error;
    const fs::file_time_type at = fs::last_write_time(file(entry.key, process::kReceiptFile), error);
    if (entry.receipt && !error) delivered.push_back({at, entry.key});
  }
  std::stable_sort(delivered.begin(), delivered.end(), [](const auto& a, const auto& b) { return a.at > b.at; });
  const fs::file_time_type oldest =
      std::chrono::time_point_cast<fs::file_time_type::duration>(std::chrono::file_clock::from_sys(
          std::chrono::system_clock::time_point(std::chrono::duration_cast<std::chrono::system_clock::duration>(
              std::chrono::nanoseconds(absl::ToUnixNanos(now - retention.age))))));
  int removed = 0;
  for (std::size_t i = 0; i < delivered.size(); ++i) {
    if (i < retention.most && delivered[i].at >= oldest) continue;
    if (remove(delivered[i].key).ok()) ++removed;
  }
  return removed;
}

}  // namespace drover::session
