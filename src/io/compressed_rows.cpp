#include "io/compressed_rows.hpp"

#include <cmath>
#include <limits>

#include "io/place.hpp"

namespace stanchion {
namespace {

Status check_entry(Index row, Index column, double value, Index rows, Offset entry, const std::string& path,
                   const DofMap* dofs) {
  if (row < 0 || row >= rows || column < 0 || column >= rows) {
    const Index wrong = row < 0 || row >= rows ? row : column;
    return Status::bad_input("index-out-of-range",
                             "entry " + std::to_string(entry) + " (from 0) has index " +
                                 std::to_string(wrong) + ", outside 0 to " + std::to_string(rows - 1),
                             path, "export the matrix again");
  }
  if (!std::isfinite(value)) {
    return Status::bad_input("not-finite",
                             "the value at " + entry_name(row, column, dofs) + " is not a finite number",
                             at_entry(path, row, column),
                             "find the element that produced it: often one of zero length or zero area");
  }
  return {};
}

}  // namespace

Status check_shape(Offset rows, Offset columns, const std::string& path) {
  if (rows != columns) {
    return Status::bad_input(
        "not-square",
        "the matrix has " + std::to_string(rows) + " rows and " + std::to_string(columns) + " columns", path,
        "export the square matrix");
  }
  if (rows < 1)
    return Status::bad_input("empty-matrix", "the matrix has no rows", path, "export the matrix again");
  if (rows > std::numeric_limits<Index>::max() - 1) {
    return Status::bad_input("too-many-rows", std::to_string(rows) + " rows are more than 2147483646", path,
                             "check the shape");
  }
  return {};
}

Status check_row_pointers(const Buffer<Offset>& pointers, Offset entries, const std::string& path) {
  for (Offset row = 0; row + 1 < pointers.size(); ++row) {
    if (pointers[row] <= pointers[row + 1]) continue;
    return Status::bad_input("bad-pointers", "the row pointers fall after row " + std::to_string(row + 1),
                             path, "export the matrix again");
  }
  if (pointers[0] == 0 && pointers[pointers.size() - 1] == entries) return {};
  return Status::bad_input(
      "bad-pointers", "the row pointers do not run from 0 to the " + std::to_string(entries) + " entries",
      path, "export the matrix again");
}

Status spread_rows(const Buffer<Offset>& pointers, Index rows, bool by_columns, EntryList& entries,
                   const std::string& path, const DofMap* dofs) {
  for (Index line = 0; line < rows; ++line) {
    for (Offset k = pointers[line]; k < pointers[Offset{line} + 1]; ++k) {
      const Index index = entries.row[k];
      const Index row = by_columns ? index : line, column = by_columns ? line : index;
      if (Status status = check_entry(row, column, entries.value[k], rows, k, path, dofs); !status.ok())
        return status;
      entries.set(k, row, column, entries.value[k]);
    }
  }
  return {};
}

Status fold_entries(Index rows, EntryList& entries, const std::string& path, const DofMap* dofs) {
  for (Offset k = 0; k < entries.size(); ++k) {
    const Index row = entries.row[k], column = entries.column[k];
    if (Status status = check_entry(row, column, entries.value[k], rows, k, path, dofs); !status.ok())
      return status;
    entries.set(k, row, column, entries.value[k]);
  }
  return {};
}

}  // namespace stanchion
