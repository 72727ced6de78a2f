// What a worker must not forget, on its disk: who it is, the orders it took, and what became of them until the
// coordinator has receipts for it.
//
//   <folder>/lock                       held by the one daemon that uses the spool
//   <folder>/identity                   store, highest term, incarnation, newest receipt
//   <folder>/attempts/<run>.<fence>/    order    the grant, before anything is done for it
//                                       begun, ended, stop   of its runner (process/)
//                                       report   how it ended, before that is said to anybody
//                                       receipt  proof that the coordinator has the report on its own disk
#pragma once

#include <cstddef>
#include <cstdint>
#include <memory>
#include <mutex>
#include <string>
#include <utility>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "absl/time/time.h"
#include "drover/v1/work.pb.h"
#include "process/files.h"
#include "session/roster.h"

namespace drover::session {

struct Identity {
  std::string store_id;  // empty: no coordinator was met yet
  std::int64_t term = 0;
  std::int64_t incarnation = 0;
  v1::Receipt newest_receipt;  // event 0: none yet
};

// Which files an attempt's folder holds.
struct SpoolEntry {
  Key key;
  bool order = false, report = false, receipt = false;
};

struct Retention {
  absl::Duration age = absl::Hours(24 * 14);
  std::size_t most = 10'000;  // delivered entries
};

// Thread-safe. Every write is durable before it returns. Errors: RESOURCE_EXHAUSTED when the disk is full, DATA_LOSS
// for a file that cannot be read as what it should be, each with the file's name.
class Spool {
 public:
  // Makes the folder where there is none, locks it and raises the incarnation. FAILED_PRECONDITION: another daemon uses
  // it, or it is not this user's to write. `files` must outlive the spool.
  static absl::StatusOr<std::unique_ptr<Spool>> open(const std::string& folder, process::Files& files);
  Spool(const Spool&) = delete;
  Spool& operator=(const Spool&) = delete;
  ~Spool();

  const std::string& folder() const { return folder_; }
  std::string attempt_folder(const Key& key) const;

  Identity identity() const;
  // Remembers the store and the term. FAILED_PRECONDITION, and nothing changes: another store, or a lower term.
  absl::Status adopt(const std::string& store_id, std::int64_t term);

  absl::Status write_order(const v1::Grant& grant);
  absl::Status write_report(const v1::AttemptReport& report);
  absl::Status write_receipts(const std::vector<v1::Receipt>& receipts);
  absl::StatusOr<v1::Grant> order(const Key& key) const;
  absl::StatusOr<v1::AttemptReport> report(const Key& key) const;
  bool knows(const Key& key) const;  // has an order of it, also a delivered one

  std::vector<SpoolEntry> entries() const;  // by run and fence
  // Removes an attempt's folder: one without an order, or one that the coordinator told to forget.
  absl::Status remove(const Key& key);
  // Removes delivered entries that are older than the retention, or too many, the older first; how many.
  int prune(const Retention& retention, absl::Time now);

 private:
  Spool(std::string folder, process::Files& files) : folder_(std::move(folder)), files_(files) {}
  std::string file(const Key& key, const char* name) const;
  absl::Status lock();
  absl::Status read_identity();
  absl::Status write_identity(const Identity& identity);

  const std::string folder_;
  process::Files& files_;
  mutable std::mutex mutex_;  // of identity_
  Identity identity_;
  int lock_ = -1;
};

}  // namespace drover::session
