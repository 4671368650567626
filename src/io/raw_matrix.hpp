// A matrix as a file gave it: entries in file order, before symmetry and duplicates are dealt with.
#pragma once

#include <functional>
#include <optional>
#include <string>
#include <vector>

#include "base/buffer.hpp"
#include "io/dof_map.hpp"
#include "stanchion/status.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// Entries folded to the lower triangle: column <= row always. `row` holds ~row (so negative) where the file
/// had the entry in the upper triangle. 16 bytes an entry.
struct EntryList {
  Buffer<Index> row, column;
  Buffer<double> value;

  EntryList() = default;
  explicit EntryList(Offset entries) : row(entries), column(entries), value(entries) {}

  Offset size() const { return value.size(); }

  void set(Offset position, Index file_row, Index file_column, double file_value) {
    const bool upper = file_row < file_column;
    row[position] = upper ? ~file_column : file_row;
    column[position] = upper ? file_row : file_column;
    value[position] = file_value;
  }
};

/// A place in the matrix, equations from 0, in the triangle the file has it.
struct EntryPlace {
  Index row = 0, column = 0;
};

struct RawMatrix {
  Index rows = 0;
  EntryList entries;
  bool declared_symmetric = false;  ///< the file itself says that one triangle stands for both
  std::string format;               ///< in words, e.g. "Matrix Market, coordinate real symmetric"
  Warnings warnings;
  std::optional<DofMap> dofs;  ///< node-keyed files only

  /// Line numbers (from 1) of the first two entries at a place, 0 where there is none; empty for files
  /// without lines. Rereads the text: only for messages.
  std::function<std::pair<Offset, Offset>(EntryPlace)> lines_of;
};

}  // namespace stanchion
