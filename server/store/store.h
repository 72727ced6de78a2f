// The store: event rows in a hash chain, and tables that are a function of them (design.md, I5).
//
// One object is the only writer of its folder. Everything that changes goes through append(): the event's row and
// the changes of tables that follow from it are one step of the transaction.
#pragma once

#include <cstdint>
#include <map>
#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "absl/status/status.h"
#include "absl/status/statusor.h"
#include "store/connection.h"
#include "store/folder.h"
#include "store/rows.h"
#include "study/events.pb.h"

namespace drover::store {

struct StoreOptions {
  Folder::Checks checks;
  std::string vfs;                   // SQLite VFS; empty: the default. For fault tests.
  std::string fresh_id;              // the id of a store that is made now; unguessable
  std::int64_t create_us = 0;        // wall time, for people
  bool accept_lost_history = false;  // open a store that is behind its high-water mark
  std::int64_t most_pages = 0;       // 0: no limit of our own
};

// Not thread-safe: the writer's thread alone.
//
// Errors of every call: RESOURCE_EXHAUSTED the disk is full (the transaction may be gone: see in_transaction());
// DATA_LOSS a read, write or sync failed or the file is damaged: end the process; ABORTED or INTERNAL: the event does
// not fit the tables, a bug.
class Store {
 public:
  // Locks the folder, lets SQLite recover, migrates, checks the chain over the last events and the high-water mark.
  // FAILED_PRECONDITION and ABORTED as Folder::open and migrate; DATA_LOSS, in words, when the chain is broken or the
  // store is behind its mark.
  static absl::StatusOr<std::unique_ptr<Store>> open(const std::string& folder, StoreOptions options);
  Store(const Store&) = delete;
  Store& operator=(const Store&) = delete;

  // --- transactions: begin, then for each request a savepoint, then commit ---
  absl::Status begin();
  absl::Status savepoint();
  absl::Status release();      // keeps what was done since the savepoint
  absl::Status rollback_to();  // undoes it; the savepoint stays
  absl::Status commit();       // after OK it survives a power loss
  void rollback();
  bool in_transaction() const { return connection_->in_transaction(); }
  absl::Status checkpoint();

  absl::StatusOr<Appended> append(const study::Event& event);

  const std::string& store_id() const { return id_; }
  std::int64_t term() const { return term_; }
  const Appended& head() const { return head_; }
  const std::string& folder() const { return folder_->path(); }

  // --- what requests ask ---
  absl::StatusOr<std::optional<StoredAnswer>> answer_of(const std::string& request_id);
  absl::StatusOr<bool> has_study(const std::string& name);
  absl::StatusOr<std::optional<RunRecord>> find_run(std::int64_t run);
  absl::StatusOr<std::optional<AttemptRecord>> find_attempt(std::int64_t run, std::int64_t fence);

  // --- what a start needs: everything open, by key and never whole tables ---
  struct Numbers {
    std::int64_t study = 0, run = 0, session = 0;  // the largest of each
  };
  absl::StatusOr<Numbers> numbers();
  absl::StatusOr<std::vector<v1::CodeDefinition>> codes();       // in the order of their definition
  absl::StatusOr<std::vector<study::SessionOpened>> sessions();  // the newest of each worker
  absl::StatusOr<std::map<std::string, std::int32_t>> licence_pools();
  absl::StatusOr<std::vector<StudyRow>>
  open_studies();  // neither FINISHED nor STOPPED, with those that have open attempts
  absl::StatusOr<std::optional<StudyRow>> study(std::int64_t id);
  absl::StatusOr<std::optional<study::CandidateScore>> score(std::int64_t study, std::int64_t candidate);
  absl::StatusOr<std::vector<CandidateRow>> open_candidates(std::int64_t study);
  // Runs that are open, set aside, or settled or withdrawn with an attempt that has not ended; with those of their
  // attempts that are open or ended abnormally.
  absl::StatusOr<std::vector<RunRow>> live_runs();
  // Settled runs of candidates that are not whole, with their settling attempt.
  absl::StatusOr<std::vector<RunRow>> partial_results(std::int64_t study);

 private:
  Store() = default;
  absl::Status recover(const StoreOptions& options);
  absl::Status create(const StoreOptions& options);
  absl::Status check_chain();
  absl::Status check_high_water(bool accept_lost_history);

  // Order matters: statements go before their connection, the connection before the folder's lock.
  std::unique_ptr<Folder> folder_;
  std::unique_ptr<Connection> connection_;
  std::unique_ptr<Prepared> sql_;
  std::string id_;
  std::int64_t term_ = 0;
  Appended head_;       // as of now
  Appended committed_;  // as of the last commit
  Appended saved_;      // as of the savepoint
  std::int64_t saved_term_ = 0, committed_term_ = 0;
};

}  // namespace drover::store
