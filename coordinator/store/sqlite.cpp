#include "coordinator/store/sqlite.hpp"

namespace holdfast::coordinator {
SqliteFailure failureOf(sqlite3* database) {
  const int code = sqlite3_extended_errcode(database);
  const char* path = sqlite3_db_filename(database, "main");
  const std::string file = path != nullptr ? path : "";
  const std::string folder = std::filesystem::path(file).parent_path().string();
  const std::string technical = std::string(" (SQLite: ") + sqlite3_errmsg(database) + ")";
  std::string message = "store " + file + ": ";
  switch (code & 0xFF) {
    case SQLITE_FULL:
      message += "no space left; free some on the file system of " + folder +
                 " and run again: everything landed so far is kept";
      break;
    case SQLITE_READONLY:
    case SQLITE_PERM:
      message += "it may not be written; make the file and its folder " + folder + " writable for you";
      break;
    case SQLITE_CANTOPEN:
      message += "it cannot be opened; the folder " + folder + " must exist and be writable for you";
      break;
    case SQLITE_BUSY:
    case SQLITE_LOCKED:
      message += "another program has held it for writing for too long; close that program and run again";
      break;
    case SQLITE_IOERR:
      message +=
          "the disk did not read or write it; check the file system and its free space, then run "
          "again: everything landed so far is kept";
      break;
    case SQLITE_CORRUPT:
      message +=
          "the file is damaged; move it away, save what can be saved with the sqlite3 shell's "
          ".recover, and run the study again";
      break;
    case SQLITE_NOTADB:
      message += "the file is not a SQLite database; name another file";
      break;
    default:
      message += "SQLite reports an error";
  }
  return {code, message + technical};
}

std::string quoted(std::string_view text) {
  std::string out = "'";
  for (const char sign : text) out += sign == '\'' ? std::string("''") : std::string(1, sign);
  return out + "'";
}

std::string named(std::string_view name) {
  std::string out = "\"";
  for (const char sign : name) out += sign == '"' ? std::string("\"\"") : std::string(1, sign);
  return out + "\"";
}

Statement::Statement(sqlite3* database, std::string_view sql) : database_(database) {
  if (sqlite3_prepare_v2(database, sql.data(), static_cast<int>(sql.size()), &statement_, nullptr) !=
      SQLITE_OK)
    fail();
}

Statement::~Statement() {
  sqlite3_finalize(statement_);
}

void Statement::fail() const {
  throw failureOf(database_);
}

Statement& Statement::bind(int parameter, std::int64_t value) {
  if (sqlite3_bind_int64(statement_, parameter, value) != SQLITE_OK) fail();
  return *this;
}

Statement& Statement::bind(int parameter, double value) {
  if (sqlite3_bind_double(statement_, parameter, value) != SQLITE_OK) fail();
  return *this;
}

Statement& Statement::bind(int parameter, std::string_view text) {
  // An empty text is a text, not NULL.
  const char* data = text.empty() ? "" : text.data();
  if (sqlite3_bind_text64(statement_, parameter, data, text.size(), SQLITE_STATIC, SQLITE_UTF8) != SQLITE_OK)
    fail();
  return *this;
}

Statement& Statement::bind(int parameter, std::optional<double> value) {
  return value ? bind(parameter, *value) : bindNull(parameter);
}

Statement& Statement::bindBytes(int parameter, std::span<const char> bytes) {
  if (sqlite3_bind_blob64(statement_, parameter, bytes.data(), bytes.size(), SQLITE_STATIC) != SQLITE_OK)
    fail();
  return *this;
}

Statement& Statement::bindNull(int parameter) {
  if (sqlite3_bind_null(statement_, parameter) != SQLITE_OK) fail();
  return *this;
}

bool Statement::row() {
  const int code = sqlite3_step(statement_);
  if (code == SQLITE_ROW) return true;
  if (code != SQLITE_DONE) {
    const SqliteFailure failure = failureOf(database_);
    sqlite3_reset(statement_);
    throw failure;
  }
  sqlite3_reset(statement_);
  return false;
}

void Statement::run() {
  while (row()) {
  }
}

int Statement::columns() const {
  return sqlite3_column_count(statement_);
}

bool Statement::isNull(int column) const {
  return sqlite3_column_type(statement_, column) == SQLITE_NULL;
}

std::int64_t Statement::integer(int column) const {
  return sqlite3_column_int64(statement_, column);
}

double Statement::real(int column) const {
  return sqlite3_column_double(statement_, column);
}

std::string Statement::text(int column) const {
  const std::span<const char> content = bytes(column);
  return {content.begin(), content.end()};
}

std::span<const char> Statement::bytes(int column) const {
  // The pointer first, then the length: SQLite may convert in between.
  const void* data = sqlite3_column_blob(statement_, column);
  const int size = sqlite3_column_bytes(statement_, column);
  return {static_cast<const char*>(data), static_cast<std::size_t>(size)};
}

Connection::Connection(const std::filesystem::path& file) {
  constexpr int kFlags =
      SQLITE_OPEN_READWRITE | SQLITE_OPEN_CREATE | SQLITE_OPEN_NOMUTEX | SQLITE_OPEN_EXRESCODE;
  if (sqlite3_open_v2(file.c_str(), &database_, kFlags, nullptr) != SQLITE_OK) {
    SqliteFailure failure = failureOf(database_);
    sqlite3_close(database_);
    throw failure;
  }
  sqlite3_busy_timeout(database_, kPatienceMilliseconds);
}

Connection::~Connection() {
  sqlite3_close(database_);
}

void Connection::execute(const std::string& sql) {
  if (sqlite3_exec(database_, sql.c_str(), nullptr, nullptr, nullptr) != SQLITE_OK)
    throw failureOf(database_);
}

std::int64_t Connection::integer(const std::string& sql) {
  Statement statement(database_, sql);
  return statement.row() ? statement.integer(0) : 0;
}

Transaction::Transaction(Connection& connection) : connection_(connection) {
  connection_.execute("BEGIN IMMEDIATE");
}

Transaction::~Transaction() {
  // Some failures (a full disk) have rolled back already.
  if (open_ && sqlite3_get_autocommit(connection_.handle()) == 0)
    sqlite3_exec(connection_.handle(), "ROLLBACK", nullptr, nullptr, nullptr);
}

void Transaction::commit() {
  connection_.execute("COMMIT");
  open_ = false;
}

}  // namespace holdfast::coordinator
