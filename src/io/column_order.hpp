// Entries in file order to compressed columns.
#pragma once

#include <vector>

#include "base/threads.hpp"
#include "io/raw_matrix.hpp"

namespace stanchion {

/// Entries that one piece of parallel work takes.
inline constexpr Offset kEntriesPerPiece = Offset{1} << 18;

/// Row of an entry whose stored row may carry the mark of the upper triangle.
inline Index true_row(Index stored) {
  return stored < 0 ? ~stored : stored;
}

/// True when every entry lies after the one before it, by column and row: no place occurs twice.
bool strictly_sorted(const EntryList& entries, ThreadPool& pool);

/// rows + 1 offsets: where each column's entries start once they are sorted.
Buffer<Offset> count_columns(Index rows, const EntryList& entries);

/// Moves rows and values to their columns, keeping file order inside a column; `entries.column` is used up.
/// Memory: one more copy of the rows, then of the values (and of destinations beyond 2^32 entries).
void move_to_columns(EntryList& entries, const Buffer<Offset>& start, ThreadPool& pool);

/// Puts single columns in order, with memory of its own that is reused.
class ColumnSorter {
 public:
  /// Orders positions [begin, end) by row, lower triangle before upper, equal ones in file order.
  void sort(EntryList& entries, Offset begin, Offset end);

 private:
  std::vector<std::uint64_t> order_;
  std::vector<double> value_;
};

}  // namespace stanchion
