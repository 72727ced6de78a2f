#include "store/connection.h"

#include <array>
#include <utility>

#include "absl/strings/str_cat.h"
#include "status/try.h"

namespace drover::store {
namespace {

constexpr int kBusyMs = 5000;

}  // namespace

absl::Status to_status(sqlite3* database, int code, std::string_view what) {
  if (code == SQLITE_OK || code == SQLITE_DONE || code == SQLITE_ROW) return absl::OkStatus();
  const std::string text =
      absl::StrCat(std::string(what), ": ", database != nullptr ? sqlite3_errmsg(database) : sqlite3_errstr(code), " (",
                   sqlite3_errstr(code), ", SQLite code ", code, ")");
  // The index of the log could not grow: nothing was written.
  if (code == SQLITE_IOERR_SHMSIZE) return absl::ResourceExhaustedError(absl::StrCat("the disk is full: ", text));
  switch (code & 0xff) {
    case SQLITE_FULL:
      return absl::ResourceExhaustedError(absl::StrCat("the disk is full: ", text));
    case SQLITE_IOERR:
    case SQLITE_CORRUPT:
    case SQLITE_NOTADB:
      return absl::DataLossError(text);
    case SQLITE_READONLY:
    case SQLITE_CANTOPEN:
      return absl::PermissionDeniedError(text);
    case SQLITE_BUSY:
    case SQLITE_LOCKED:
      return absl::UnavailableError(text);
    case SQLITE_NOMEM:
      return absl::ResourceExhaustedError(text);
    case SQLITE_INTERRUPT:
      return absl::DeadlineExceededError(text);
    default:
      return absl::InternalError(text);
  }
}

absl::StatusOr<std::unique_ptr<Connection>> Connection::open(const std::string& path, Kind kind,
                                                             const std::string& vfs) {
  std::unique_ptr<Connection> connection(new Connection);
  const int flags = SQLITE_OPEN_NOMUTEX | SQLITE_OPEN_EXRESCODE |
                    (kind == Kind::kWriter ? SQLITE_OPEN_READWRITE | SQLITE_OPEN_CREATE : SQLITE_OPEN_READWRITE);
  const int code = sqlite3_open_v2(path.c_str(), &connection->database_, flags, vfs.empty() ? nullptr : vfs.c_str());
  if (code != SQLITE_OK) return to_status(connection->database_, code, path);
  DROVER_TRY(connection->set_up(kind));
  return connection;
}

Connection::~Connection() { sqlite3_close_v2(database_); }

absl::Status Connection::set_up(Kind kind) {
  sqlite3_busy_timeout(database_, kBusyMs);
  // A misspelt column name is an error and not a text.
  sqlite3_db_config(database_, SQLITE_DBCONFIG_DQS_DML, 0, nullptr);
  sqlite3_db_config(database_, SQLITE_DBCONFIG_DQS_DDL, 0, nullptr);
  sqlite3_db_config(database_, SQLITE_DBCONFIG_DEFENSIVE, 1, nullptr);
  DROVER_TRY(execute(
      "PRAGMA trusted_schema = OFF; PRAGMA cell_size_check = ON; PRAGMA mmap_size = 0; PRAGMA temp_store = MEMORY"));
  if (kind == Kind::kReader) {
    // Checkpoints by two connections at once can corrupt the file in 3.40 (the WAL-reset race).
    DROVER_TRY(execute("PRAGMA wal_autocheckpoint = 0"));
    return execute("PRAGMA query_only = ON");
  }
  DROVER_TRY(execute("PRAGMA journal_mode = WAL"));
  DROVER_TRY(execute("PRAGMA synchronous = FULL; PRAGMA foreign_keys = ON; PRAGMA journal_size_limit = 67108864"));
  const std::array<std::pair<const char*, std::int64_t>, 3> wanted = {
      {{"PRAGMA synchronous", 2}, {"PRAGMA foreign_keys", 1}, {"PRAGMA trusted_schema", 0}}};
  for (const auto& [pragma, value] : wanted) {
    DROVER_ASSIGN(const std::int64_t got, number(pragma));
    if (got != value) return absl::InternalError(absl::StrCat(pragma, " is ", got, " and should be ", value));
  }
  Statement mode(*this, "PRAGMA journal_mode");
  const bool wal = mode.next() && mode.text(0) == "wal";
  DROVER_TRY(mode.end());
  return wal ? absl::OkStatus()
             : absl::FailedPreconditionError("this file system does not let SQLite keep a write-ahead log");
}

absl::Status Connection::execute(const std::string& sql) {
  return to_status(database_, sqlite3_exec(database_, sql.c_str(), nullptr, nullptr, nullptr), sql.substr(0, 60));
}

absl::StatusOr<std::int64_t> Connection::number(const std::string& sql) {
  Statement statement(*this, sql);
  const std::int64_t value = statement.next() ? statement.integer(0) : 0;
  DROVER_TRY(statement.end());
  return value;
}

bool Connection::in_transaction() const { return sqlite3_get_autocommit(database_) == 0; }

std::int64_t Connection::changes() const { return sqlite3_changes64(database_); }

Statement::Statement(Connection& connection, std::string sql) : connection_(&connection), sql_(std::move(sql)) {}

Statement::~Statement() { sqlite3_finalize(statement_); }

Statement::Statement(Statement&& other) noexcept { *this = std::move(other); }

Statement& Statement::operator=(Statement&& other) noexcept {
  std::swap(connection_, other.connection_);
  std::swap(sql_, other.sql_);
  std::swap(statement_, other.statement_);
  std::swap(code_, other.code_);
  return *this;
}

bool Statement::prepare() {
  if (statement_ == nullptr && code_ == SQLITE_OK) {
    code_ = sqlite3_prepare_v3(connection_->raw(), sql_.c_str(), static_cast<int>(sql_.size()) + 1,
                               SQLITE_PREPARE_PERSISTENT, &statement_, nullptr);
  }
  return code_ == SQLITE_OK;
}

Statement& Statement::bind(int index, std::int64_t value) {
  if (prepare()) code_ = sqlite3_bind_int64(statement_, index, value);
  return *this;
}

Statement& Statement::bind(int index, std::string_view text) {
  if (prepare()) {
    code_ = sqlite3_bind_text64(statement_, index, text.data() == nullptr ? "" : text.data(), text.size(),
                                SQLITE_TRANSIENT, SQLITE_UTF8);
  }
  return *this;
}

Statement& Statement::bind_bytes(int index, std::string_view bytes) {
  if (prepare()) {
    code_ = sqlite3_bind_blob64(statement_, index, bytes.data() == nullptr ? "" : bytes.data(), bytes.size(),
                                SQLITE_TRANSIENT);
  }
  return *this;
}

Statement& Statement::bind_null(int index) {
  if (prepare()) code_ = sqlite3_bind_null(statement_, index);
  return *this;
}

bool Statement::next() {
  if (!prepare()) return false;
  const int code = sqlite3_step(statement_);
  if (code == SQLITE_ROW) return true;
  if (code != SQLITE_DONE) code_ = code;
  return false;
}

absl::Status Statement::end() {
  const absl::Status status = to_status(connection_->raw(), code_, sql_.substr(0, 80));
  if (statement_ != nullptr) {
    sqlite3_reset(statement_);
    sqlite3_clear_bindings(statement_);
  }
  code_ = SQLITE_OK;
  return status;
}

absl::Status Statement::run() {
  while (next()) {
  }
  return end();
}

absl::Status Statement::run_on_one(std::string_view what) {
  DROVER_TRY(run());
  if (connection_->changes() == 1) return absl::OkStatus();
  return absl::InternalError(absl::StrCat(std::string(what), ": ", connection_->changes(), " rows changed, not 1"));
}

std::int64_t Statement::integer(int column) const { return sqlite3_column_int64(statement_, column); }

std::string Statement::text(int column) const { return bytes(column); }

std::string Statement::bytes(int column) const {
  const void* const data = sqlite3_column_blob(statement_, column);
  const int size = sqlite3_column_bytes(statement_, column);
  return data == nullptr ? std::string() : std::string(static_cast<const char*>(data), static_cast<std::size_t>(size));
}

bool Statement::null(int column) const { return sqlite3_column_type(statement_, column) == SQLITE_NULL; }

Statement& Prepared::operator[](std::string_view sql) {
  const auto at = statements_.find(sql);
  if (at != statements_.end()) return at->second;
  return statements_.emplace(std::string(sql), Statement(connection_, std::string(sql))).first->second;
}

}  // namespace drover::store
