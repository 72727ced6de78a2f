#include "store/store.h"

#include <utility>

#include "absl/strings/str_cat.h"
#include "status/try.h"
#include "store/chain.h"
#include "store/migrations.h"
#include "store/tables.h"

namespace drover::store {
namespace {

constexpr std::int64_t kEventsChecked = 10'000;

std::string lost_history(const std::string& path, const std::string& what) {
  return absl::StrCat(
      path, ": ", what,
      ". The write-ahead log beside it may have been deleted or damaged, or an older copy was put back. "
      "Put the right files back; to go on without what is missing: --accept-lost-history");
}

}  // namespace

absl::StatusOr<std::unique_ptr<Store>> Store::open(const std::string& folder, StoreOptions options) {
  std::unique_ptr<Store> store(new Store);
  DROVER_ASSIGN(store->folder_, Folder::open(folder, options.checks));
  DROVER_ASSIGN(store->connection_,
                Connection::open(store->folder_->database(), Connection::Kind::kWriter, options.vfs));
  if (options.most_pages > 0) {
    DROVER_TRY(store->connection_->execute(absl::StrCat("PRAGMA max_page_count = ", options.most_pages)));
  }
  if (const absl::Status made = migrate(*store->connection_); !made.ok()) {
    return absl::Status(made.code(), absl::StrCat(store->folder_->database(), ": ", made.message()));
  }
  store->sql_ = std::make_unique<Prepared>(*store->connection_);
  DROVER_TRY(store->recover(options));
  return store;
}

absl::Status Store::recover(const StoreOptions& options) {
  Statement& row = (*sql_)["SELECT id, term FROM store"];
  const bool made = row.next();
  if (made) {
    id_ = row.text(0);
    term_ = row.integer(1);
  }
  DROVER_TRY(row.end());
  head_ = {0, chain_start()};
  if (!made) DROVER_TRY(create(options));
  DROVER_TRY(check_chain());
  DROVER_TRY(check_high_water(options.accept_lost_history));
  committed_ = saved_ = head_;
  committed_term_ = saved_term_ = term_;
  return folder_->set_high_water({head_.number, head_.hash});
}

absl::Status Store::create(const StoreOptions& options) {
  if (options.fresh_id.empty()) return absl::InvalidArgumentError("a new store needs an id");
  study::Event event;
  event.set_time_us(options.create_us);
  event.mutable_store_created()->set_store_id(options.fresh_id);
  DROVER_TRY(begin());
  DROVER_TRY(append(event).status());
  DROVER_TRY(connection_->execute("COMMIT"));
  id_ = options.fresh_id;
  return absl::OkStatus();
}

// From the first of the events that are looked at, whose predecessor's hash is taken as it is.
absl::Status Store::check_chain() {
  DROVER_ASSIGN(const std::int64_t last, connection_->number("SELECT coalesce(max(number), 0) FROM event"));
  const std::int64_t first = std::max<std::int64_t>(1, last - kEventsChecked + 1);
  std::string before = chain_start();
  std::int64_t expected = first;
  Statement& rows = (*sql_)["SELECT number, bytes, hash FROM event WHERE number >= ?1 ORDER BY number"];
  rows.bind(1, first > 1 ? first - 1 : 1);
  bool skip = first > 1;
  absl::Status broken;
  while (broken.ok() && rows.next()) {
    const std::string hash = rows.bytes(2);
    const bool right =
        rows.integer(0) == (skip ? expected - 1 : expected) && (skip || chain_next(before, rows.bytes(1)) == hash);
    if (!right) {
      broken = absl::DataLossError(absl::StrCat(folder_->database(), ": the chain of events is broken at event ",
                                                rows.integer(0), "; the file is damaged. Put a backup back"));
    }
    if (!skip) ++expected;
    skip = false;
    before = hash;
  }
  DROVER_TRY(rows.end());
  DROVER_TRY(broken);
  head_ = {last, before};
  return absl::OkStatus();
}

absl::Status Store::check_high_water(bool accept_lost_history) {
  DROVER_ASSIGN(const std::optional<Folder::HighWater> mark, folder_->high_water());
  if (!mark || accept_lost_history) return absl::OkStatus();
  if (mark->event > head_.number) {
    return absl::DataLossError(lost_history(
        folder_->database(), absl::StrCat("it ends at event ", head_.number, ", but event ", mark->event,
                                          " was committed: ", mark->event - head_.number, " events are missing")));
  }
  Statement& row = (*sql_)["SELECT hash FROM event WHERE number = ?1"];
  row.bind(1, mark->event);
  const bool same = mark->event == 0 || (row.next() && row.bytes(0) == mark->hash);
  DROVER_TRY(row.end());
  if (same) return absl::OkStatus();
  return absl::DataLossError(lost_history(
      folder_->database(), absl::StrCat("event ", mark->event, " is another one than was committed here")));
}

absl::Status Store::begin() { return connection_->execute("BEGIN IMMEDIATE"); }

absl::Status Store::savepoint() {
  saved_ = head_;
  saved_term_ = term_;
  return (*sql_)["SAVEPOINT request"].run();
}

absl::Status Store::release() { return (*sql_)["RELEASE request"].run(); }

absl::Status Store::rollback_to() {
  DROVER_TRY((*sql_)["ROLLBACK TO request"].run());
  head_ = saved_;
  term_ = saved_term_;
  return absl::OkStatus();
}

absl::Status Store::commit() {
  DROVER_TRY((*sql_)["COMMIT"].run());
  committed_ = head_;
  committed_term_ = term_;
  // Of no use to this commit, which is on disk; a mark that cannot be written is only too old.
  static_cast<void>(folder_->set_high_water({head_.number, head_.hash}));
  return absl::OkStatus();
}

void Store::rollback() {
  if (in_transaction()) static_cast<void>(connection_->execute("ROLLBACK"));
  head_ = committed_;
  term_ = committed_term_;
}

absl::Status Store::checkpoint() { return connection_->execute("PRAGMA wal_checkpoint(TRUNCATE)"); }

absl::StatusOr<Appended> Store::append(const study::Event& event) {
  const std::string bytes = canonical(event);
  const Appended next{head_.number + 1, chain_next(head_.hash, bytes)};
  Statement& insert = (*sql_)[R"sql(
      INSERT INTO event(number, study, kind, time_us, bytes, hash) VALUES (?1, ?2, ?3, ?4, ?5, ?6))sql"];
  insert.bind(1, next.number).bind(2, event.study()).bind(3, std::int64_t{event.kind_case()});
  insert.bind(4, event.time_us()).bind_bytes(5, bytes).bind_bytes(6, next.hash);
  DROVER_TRY(insert.run());
  DROVER_TRY(apply_to_tables(*sql_, event, next.number));
  if (event.has_term_begun()) term_ = event.term_begun().term();
  head_ = next;
  return next;
}

}  // namespace drover::store
