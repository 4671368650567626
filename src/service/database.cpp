// The only file that knows SQLite.
#include "service/database.hpp"

#include <sqlite3.h>

#include <utility>

namespace stanchion::service {
namespace {

[[noreturn]] void fail(sqlite3* handle, int code) {
  const std::string what = handle != nullptr ? sqlite3_errmsg(handle) : sqlite3_errstr(code);
  throw DatabaseError("the job store: " + what, (code & 0xff) == SQLITE_FULL);
}

}  // namespace

struct Database::Parts {
  sqlite3* handle = nullptr;
  ~Parts() { sqlite3_close(handle); }
};

struct Statement::Parts {
  sqlite3* handle = nullptr;
  sqlite3_stmt* statement = nullptr;
  int bound = 0;
  ~Parts() { sqlite3_finalize(statement); }
};

Database::Database(const std::string& path) : parts_(std::make_unique<Parts>()) {
  const int flags = SQLITE_OPEN_READWRITE | SQLITE_OPEN_CREATE | SQLITE_OPEN_NOMUTEX | SQLITE_OPEN_EXRESCODE;
  const int code = sqlite3_open_v2(path.c_str(), &parts_->handle, flags, nullptr);
  if (code != SQLITE_OK) fail(parts_->handle, code);
  sqlite3_busy_timeout(parts_->handle, 10'000);
  execute("PRAGMA journal_mode = WAL; PRAGMA synchronous = FULL; PRAGMA foreign_keys = ON;");
}

Database::~Database() = default;

void Database::execute(const std::string& sql) {
  const int code = sqlite3_exec(parts_->handle, sql.c_str(), nullptr, nullptr, nullptr);
  if (code != SQLITE_OK) fail(parts_->handle, code);
}

std::int64_t Database::last_row() const {
  return sqlite3_last_insert_rowid(parts_->handle);
}

Statement::Statement(Database& database, std::string_view sql) : parts_(std::make_unique<Parts>()) {
  parts_->handle = database.parts_->handle;
  const int code = sqlite3_prepare_v3(parts_->handle, sql.data(), static_cast<int>(sql.size()),
                                      SQLITE_PREPARE_PERSISTENT, &parts_->statement, nullptr);
  if (code != SQLITE_OK) fail(parts_->handle, code);
}

Statement::~Statement() = default;
Statement::Statement(Statement&&) noexcept = default;

Statement& Statement::bind(std::int64_t value) {
  sqlite3_bind_int64(parts_->statement, ++parts_->bound, value);
  return *this;
}

Statement& Statement::bind(double value) {
  sqlite3_bind_double(parts_->statement, ++parts_->bound, value);
  return *this;
}

Statement& Statement::bind(std::string_view value) {
  sqlite3_bind_text64(parts_->statement, ++parts_->bound, value.data(), value.size(), SQLITE_TRANSIENT,
                      SQLITE_UTF8);
  return *this;
}

Statement& Statement::bind_null() {
  sqlite3_bind_null(parts_->statement, ++parts_->bound);
  return *this;
}

bool Statement::step() {
  const int code = sqlite3_step(parts_->statement);
  if (code == SQLITE_ROW) return true;
  reset();
  if (code != SQLITE_DONE) fail(parts_->handle, code);
  return false;
}

std::int64_t Statement::run() {
  while (step()) {
  }
  return sqlite3_changes64(parts_->handle);
}

void Statement::reset() {
  sqlite3_reset(parts_->statement);
  parts_->bound = 0;
}

std::int64_t Statement::whole(int column) const {
  return sqlite3_column_int64(parts_->statement, column);
}

double Statement::real(int column) const {
  return sqlite3_column_double(parts_->statement, column);
}

std::string Statement::text(int column) const {
  const auto* bytes = reinterpret_cast<const char*>(sqlite3_column_text(parts_->statement, column));
  if (bytes == nullptr) return {};
  return {bytes, static_cast<std::size_t>(sqlite3_column_bytes(parts_->statement, column))};
}

bool Statement::is_null(int column) const {
  return sqlite3_column_type(parts_->statement, column) == SQLITE_NULL;
}

std::optional<std::int64_t> Statement::maybe_whole(int column) const {
  if (is_null(column)) return std::nullopt;
  return whole(column);
}

std::optional<double> Statement::maybe_real(int column) const {
  if (is_null(column)) return std::nullopt;
  return real(column);
}

std::optional<std::string> Statement::maybe_text(int column) const {
  if (is_null(column)) return std::nullopt;
  return text(column);
}

std::string database_version() {
  return sqlite3_libversion();
}

}  // namespace stanchion::service
