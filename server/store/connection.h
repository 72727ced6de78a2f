// SQLite with the settings that the store rests on, and statements that copy out.
#pragma once

#include <sqlite3.h>

#include <cstdint>
#include <functional>
#include <map>
#include <memory>
#include <string>
#include <string_view>

#include "absl/status/status.h"
#include "absl/status/statusor.h"

namespace drover::store {

// RESOURCE_EXHAUSTED: full disk. DATA_LOSS: a read, write or sync failed, or the file is damaged; nothing in memory can
// be trusted any more. UNAVAILABLE: locked by somebody. ABORTED: a constraint refused the row. INTERNAL: the rest.
absl::Status to_status(sqlite3* database, int code, std::string_view what);

// One connection. Not thread-safe. Every setting is read back, since SQLite ignores some of them silently.
class Connection {
 public:
  enum class Kind { kWriter, kReader };
  // `vfs` empty: the default one.
  static absl::StatusOr<std::unique_ptr<Connection>> open(const std::string& path, Kind kind, const std::string& vfs);
  ~Connection();
  Connection(const Connection&) = delete;
  Connection& operator=(const Connection&) = delete;

  absl::Status execute(const std::string& sql);
  absl::StatusOr<std::int64_t> number(const std::string& sql);  // first column of the first row
  bool in_transaction() const;
  std::int64_t changes() const;
  sqlite3* raw() const { return database_; }

 private:
  Connection() = default;
  absl::Status set_up(Kind kind);
  sqlite3* database_ = nullptr;
};

// A prepared statement for many uses. The connection must outlive it. Errors wait in status() until the end of a use:
//   statement.bind(1, study).bind(2, name); while (statement.next()) use(statement.text(0));
//   DROVER_TRY(statement.end());
class Statement {
 public:
  Statement() = default;
  Statement(Connection& connection, std::string sql);
  ~Statement();
  Statement(Statement&& other) noexcept;
  Statement& operator=(Statement&& other) noexcept;

  Statement& bind(int index, std::int64_t value);
  Statement& bind(int index, std::string_view text);
  Statement& bind_bytes(int index, std::string_view bytes);
  Statement& bind_null(int index);

  bool next();         // one more row?
  absl::Status end();  // resets for the next use; the first error of this one
  absl::Status run();  // without rows
  // As run, and exactly one row must have changed: INTERNAL with `what` otherwise.
  absl::Status run_on_one(std::string_view what);

  std::int64_t integer(int column) const;
  std::string text(int column) const;
  std::string bytes(int column) const;
  bool null(int column) const;

 private:
  bool prepare();
  Connection* connection_ = nullptr;
  std::string sql_;
  sqlite3_stmt* statement_ = nullptr;
  int code_ = SQLITE_OK;
};

// Prepared statements by their text. Of one connection and one thread; goes before its connection.
class Prepared {
 public:
  explicit Prepared(Connection& connection) : connection_(connection) {}
  Statement& operator[](std::string_view sql);

 private:
  Connection& connection_;
  std::map<std::string, Statement, std::less<>> statements_;
};

}  // namespace drover::store
