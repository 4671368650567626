// Small tables in text: a header line where there is one, any customary separator, quotes, comments.
#pragma once

#include <deque>
#include <string>
#include <string_view>
#include <vector>

#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// A column a table may have. Columns are found by name when there is a header line (any order, other columns
/// are passed over), else by position.
struct CsvColumn {
  const char* name;
  bool required;
};

/// Reads one table record by record. Blank lines and lines that start with # or % are passed over; CR LF and
/// a byte order mark are tolerated (the mark by TextSource). A quoted field may hold separators and "" for a
/// quote, but no line end. The text and path outlive the reader.
class CsvReader {
 public:
  CsvReader(std::string_view text, const std::string& path, std::vector<CsvColumn> columns);

  /// The next record, one field a column in the order asked for (empty where absent). False at the end or at
  /// a fault: see status(). Fields are valid until the next call.
  bool next(std::vector<std::string_view>& fields);

  const Status& status() const { return status_; }
  Offset line() const { return line_; }
  std::string place() const;
  bool has_header() const { return has_header_; }
  /// Whether the table has this column at all; known after the first call of next().
  bool has_column(std::size_t column) const { return position_[column] >= 0; }

  /// Field as a number; on failure sets status() (named `what`) and gives false.
  bool whole(std::string_view field, const char* what, Offset& value);
  bool real(std::string_view field, const char* what, double& value);
  void fail(std::string code, std::string message, std::string remedy);

 private:
  bool next_line(std::string_view& line);
  bool split(std::string_view line);
  bool start(std::string_view line);
  std::string columns_text() const;

  std::string_view rest_;
  const std::string& path_;
  std::vector<CsvColumn> columns_;
  std::vector<int> position_;  ///< of each column in a record, -1 when absent
  std::vector<std::string_view> split_;
  std::deque<std::string> unquoted_;
  Status status_;
  Offset line_ = 0;
  char separator_ = 0;
  bool started_ = false, has_header_ = false;
};

/// A field as CSV has it: quoted where it must be.
std::string csv_field(const std::string& text);

}  // namespace stanchion
