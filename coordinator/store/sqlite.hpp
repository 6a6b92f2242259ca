// SQLite's handles with owners. Failures inside the store's room travel as SqliteFailure; the doors of
// Store turn them into Errors (see guarded).
#pragma once

#include <sqlite3.h>

#include <cstdint>
#include <filesystem>
#include <optional>
#include <span>
#include <string>
#include <string_view>

#include "thermo/result.hpp"

namespace holdfast::coordinator {

/// What went wrong, in words a user can act on.
struct SqliteFailure {
  int code = SQLITE_ERROR;  ///< extended result code
  std::string message;
};

/// One prepared statement. Parameters count from 1, columns from 0, as in SQLite.
class Statement {
 public:
  Statement(sqlite3* database, std::string_view sql);
  ~Statement();
  Statement(const Statement&) = delete;
  Statement& operator=(const Statement&) = delete;

  Statement& bind(int parameter, std::int64_t value);
  Statement& bind(int parameter, double value);
  Statement& bind(int parameter, std::string_view text);  ///< not copied: must live until the step
  Statement& bind(int parameter, std::optional<double> value);
  Statement& bindBytes(int parameter, std::span<const char> bytes);  ///< not copied
  Statement& bindNull(int parameter);

  bool row();  ///< steps: true if there is a row to read
  void run();  ///< steps to the end and is ready to be bound anew

  int columns() const;
  bool isNull(int column) const;
  std::int64_t integer(int column) const;
  double real(int column) const;
  std::string text(int column) const;
  std::span<const char> bytes(int column) const;  ///< until the next step

 private:
  [[noreturn]] void fail() const;
  sqlite3* database_;
  sqlite3_stmt* statement_ = nullptr;
};

/// One connection.
class Connection {
 public:
  /// Another program may hold the write lock for a while: a shell that changes something, a backup.
  static constexpr int kPatienceMilliseconds = 10'000;

  explicit Connection(const std::filesystem::path& file);
  ~Connection();
  Connection(const Connection&) = delete;
  Connection& operator=(const Connection&) = delete;

  sqlite3* handle() const { return database_; }
  /// Runs statements that return nothing of interest.
  void execute(const std::string& sql);
  /// The first column of the first row.
  std::int64_t integer(const std::string& sql);
  std::int64_t changes() const { return sqlite3_changes64(database_); }

 private:
  sqlite3* database_ = nullptr;
};

/// Rolls back unless it was committed.
class Transaction {
 public:
  explicit Transaction(Connection& connection);
  ~Transaction();
  Transaction(const Transaction&) = delete;
  Transaction& operator=(const Transaction&) = delete;
  void commit();

 private:
  Connection& connection_;
  bool open_ = true;
};

/// The failure of the last call on a connection, worded for people: a full disk says what to free.
SqliteFailure failureOf(sqlite3* database);

/// 'text' as an SQL literal, "name" as an SQL name.
std::string quoted(std::string_view text);
std::string named(std::string_view name);

/// Runs `work` and turns a SqliteFailure into an Error.
template <class Work>
auto guarded(Work&& work) -> decltype(work()) {
  try {
    return work();
  } catch (const SqliteFailure& failure) {
    return Error{failure.message};
  }
}

}  // namespace holdfast::coordinator
