// Rutherford-Boeing, type rsa: the lower triangle by columns.
#include <algorithm>
#include <charconv>

#include "io/shortest.hpp"
#include "io/write_formats.hpp"

namespace stanchion {
namespace {

constexpr int kValuesPerLine = 3, kValueWidth = 26, kValueDecimals = 16;

/// Right-justified in `width` columns.
void append_right(std::string& text, std::string_view field, std::size_t width) {
  if (field.size() < width) text.append(width - field.size(), ' ');
  text += field;
}

/// Writes items `per_line` a line.
class FixedColumns {
 public:
  FixedColumns(OutputFile& file, int per_line, std::size_t width)
      : file_(file), per_line_(per_line), width_(width) {}

  void add(std::string_view field) {
    append_right(line_, field, width_);
    if (++used_ == per_line_) end_line();
  }
  void end() {
    if (used_ > 0) end_line();
  }

 private:
  void end_line() {
    line_ += '\n';
    file_.write(line_);
    line_.clear();
    used_ = 0;
  }

  OutputFile& file_;
  int per_line_;
  std::size_t width_;
  std::string line_;
  int used_ = 0;
};

struct WholeFormat {
  int per_line;
  std::size_t width;

  explicit WholeFormat(Offset largest) {
    width = std::to_string(largest).size() + 1;
    per_line = static_cast<int>(80 / width);
  }
  std::string text() const { return "(" + std::to_string(per_line) + "I" + std::to_string(width) + ")"; }
};

/// 17 significant digits, which always read back as the same double.
std::string_view scientific(double value, char (&digits)[40]) {
  const auto end =
      std::to_chars(digits, digits + sizeof digits, value, std::chars_format::scientific, kValueDecimals);
  std::replace(digits, end.ptr, 'e', 'E');
  return {digits, static_cast<std::size_t>(end.ptr - digits)};
}

std::string header(const SymmetricMatrix& matrix, const WholeFormat& pointers, const WholeFormat& indices) {
  const auto lines = [](Offset items, int per_line) { return (items + per_line - 1) / per_line; };
  const Offset pointer_lines = lines(Offset{matrix.rows} + 1, pointers.per_line);
  const Offset index_lines = lines(matrix.entries(), indices.per_line);
  const Offset value_lines = lines(matrix.entries(), kValuesPerLine);
  std::string text = "Symmetric matrix, lower triangle";
  text.append(72 - text.size(), ' ');
  text += "MATRIX  \n";
  append_right(text, std::to_string(pointer_lines + index_lines + value_lines), 14);
  for (const Offset count : {pointer_lines, index_lines, value_lines})
    append_right(text, std::to_string(count), 14);
  text += "\nrsa           ";
  for (const Offset size : {Offset{matrix.rows}, Offset{matrix.rows}, matrix.entries(), Offset{0}}) {
    append_right(text, std::to_string(size), 14);
  }
  text += '\n';
  for (const std::string& format : {pointers.text(), indices.text()})
    text += format + std::string(16 - format.size(), ' ');
  return text + "(3E26.16)\n";
}

}  // namespace

void write_rutherford_boeing(const SymmetricMatrix& matrix, OutputFile& file) {
  const WholeFormat pointers(matrix.entries() + 1), indices(matrix.rows);
  file.write(header(matrix, pointers, indices));
  std::string number;
  const auto write_whole = [&number](FixedColumns& columns, Offset value) {
    number.clear();
    append_integer(number, value);
    columns.add(number);
  };
  FixedColumns pointer_lines(file, pointers.per_line, pointers.width);
  for (const Offset start : matrix.column_start) write_whole(pointer_lines, start + 1);
  pointer_lines.end();
  FixedColumns index_lines(file, indices.per_line, indices.width);
  for (const Index row : matrix.row) write_whole(index_lines, Offset{row} + 1);
  index_lines.end();
  FixedColumns value_lines(file, kValuesPerLine, kValueWidth);
  char digits[40];
  for (const double value : matrix.value) value_lines.add(scientific(value, digits));
  value_lines.end();
}

}  // namespace stanchion
