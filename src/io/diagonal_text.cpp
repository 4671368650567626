// A diagonal matrix as a vector of values, one a line.
#include <vector>

#include "io/entry_text.hpp"
#include "io/matrix_formats.hpp"
#include "io/number.hpp"
#include "io/place.hpp"

namespace stanchion {
namespace {

Status bad_value(NumberFault fault, std::string_view line, const std::string& place) {
  const std::string shown = "\"" + excerpt(line) + "\"";
  if (fault == NumberFault::kOverflow) {
    return Status::bad_input("number-overflow", shown + " is larger than any double-precision number", place,
                             "check the value");
  }
  if (fault == NumberFault::kUnderflow) {
    return Status::bad_input("number-underflow",
                             shown + " is not zero, but smaller than any double-precision number", place,
                             "write 0 if zero is meant, or choose other units");
  }
  if (fault == NumberFault::kNotFinite) {
    return Status::bad_input("not-finite", shown + " is not a finite number", place, "check the value");
  }
  return Status::bad_input("bad-number", shown + " is not a number", place,
                           "a diagonal mass is one value a line, or a matrix of row, column, value");
}

}  // namespace

Result<RawMatrix> read_diagonal_body(const ReadTask& task, std::string_view body, Offset first_line,
                                     std::optional<Offset> announced, bool whole_numbers) {
  std::vector<double> values;
  LineWalker walker(body, first_line);
  std::string_view line;
  while (walker.next(line)) {
    const std::string_view text = trimmed(line);
    if (text.empty() || text.front() == '%' || text.front() == '#') continue;
    const char* p = text.data();
    const char* const end = p + text.size();
    double value = 0;
    bool exact = true;
    const NumberFault fault =
        whole_numbers ? scan_integer_value(p, end, value, exact) : scan_real(p, end, value);
    const std::string place = at_line(task.path(), walker.number());
    if (fault != NumberFault::kNone) {
      // A header line is words where the first value should be.
      const bool word = (text.front() | 0x20) >= 'a' && (text.front() | 0x20) <= 'z';
      if (values.empty() && !announced && fault == NumberFault::kUnreadable && word) continue;
      return bad_value(fault, text, place);
    }
    if (!exact) {
      return Status::bad_input(
          "integer-rounds", "the whole number \"" + excerpt(text) + "\" is beyond 2^53 and would be rounded",
          place, "write the values as reals if their rounding is meant");
    }
    if (skip_blanks(p, end) != end) {
      return Status::bad_input("extra-text", "unexpected text after the value: \"" + excerpt(text) + "\"",
                               place,
                               "a diagonal mass is one value a line, or a matrix of row, column, value");
    }
    values.push_back(value);
  }
  const auto count = static_cast<Offset>(values.size());
  if (announced && *announced != count) {
    return Status::bad_input(
        count < *announced ? "truncated-file" : "wrong-count",
        std::to_string(*announced) + " values are announced, " + std::to_string(count) + " are there",
        at_line(task.path(), walker.number()), "write or transfer the file again");
  }
  if (count == 0) {
    return Status::bad_input("empty-file", "the file holds no values", task.path(),
                             "export the vector again");
  }
  if (Status status = check_memory(count, count, task.most_bytes, task.path()); !status.ok()) return status;
  RawMatrix raw;
  raw.rows = static_cast<Index>(count);
  raw.declared_symmetric = true;
  raw.entries = EntryList(count);
  for (Index i = 0; i < raw.rows; ++i) raw.entries.set(i, i, i, values[static_cast<std::size_t>(i)]);
  warn_unfinished_line(body.empty() || body.back() == '\n', task.path(), raw.warnings);
  return raw;
}

Result<RawMatrix> read_diagonal_text(const ReadTask& task) {
  if (task.options.role != MatrixRole::kMass) {
    return Status::bad_input(
        "one-column", "the file holds one value a line, not a matrix", task.path(),
        "a vector is accepted for a diagonal mass (--mass) only; give row, column, value");
  }
  auto raw = read_diagonal_body(task, task.source.text(), 1, std::nullopt, false);
  if (raw.ok()) raw->format = "diagonal, one value a line";
  return raw;
}

}  // namespace stanchion
