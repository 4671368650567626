// An embedded SQL database: statements with values, failures as exceptions of ours.
#pragma once

#include <cstdint>
#include <memory>
#include <optional>
#include <stdexcept>
#include <string>
#include <string_view>

namespace stanchion::service {

/// The database said no: disk full, damaged file, a defect. Caught where requests and transactions begin.
class DatabaseError : public std::runtime_error {
 public:
  DatabaseError(const std::string& what, bool no_space) : std::runtime_error(what), no_space_(no_space) {}
  bool no_space() const { return no_space_; }

 private:
  bool no_space_;
};

class Database;

/// One statement, kept for use again and again. `?` from left to right are bound in order.
class Statement {
 public:
  Statement(Database& database, std::string_view sql);
  ~Statement();
  Statement(Statement&&) noexcept;
  Statement& operator=(Statement&&) = delete;

  Statement& bind(std::int64_t value);
  Statement& bind(double value);
  Statement& bind(std::string_view value);
  Statement& bind(const char* value) { return bind(std::string_view(value)); }
  Statement& bind_null();
  template <class T>
  Statement& bind(const std::optional<T>& value) {
    return value ? bind(*value) : bind_null();
  }

  /// The next row; false at the end, when the statement is ready for other values.
  bool step();
  /// For statements without rows: runs to the end. How many rows were changed.
  std::int64_t run();
  /// Ready for other values, rows or not.
  void reset();

  std::int64_t whole(int column) const;
  double real(int column) const;
  std::string text(int column) const;
  bool is_null(int column) const;
  std::optional<std::int64_t> maybe_whole(int column) const;
  std::optional<double> maybe_real(int column) const;
  std::optional<std::string> maybe_text(int column) const;

 private:
  struct Parts;
  std::unique_ptr<Parts> parts_;
};

/// One connection. Not thread safe; connections to one file may work side by side.
class Database {
 public:
  /// Write-ahead log, and nothing is called written before the disk has it (synchronous = FULL).
  explicit Database(const std::string& path);
  ~Database();
  Database(const Database&) = delete;
  Database& operator=(const Database&) = delete;

  /// One or several statements without values.
  void execute(const std::string& sql);
  Statement statement(std::string_view sql) { return {*this, sql}; }
  std::int64_t last_row() const;

 private:
  friend class Statement;
  struct Parts;
  std::unique_ptr<Parts> parts_;
};

std::string database_version();

}  // namespace stanchion::service
