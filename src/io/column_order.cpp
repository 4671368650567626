#include "io/column_order.hpp"

#include <algorithm>
#include <atomic>
#include <cstdint>
#include <limits>
#include <type_traits>

namespace stanchion {
namespace {

/// Position in a column: by row, lower triangle before upper.
std::uint32_t key_of(Index stored) {
  return static_cast<std::uint32_t>(true_row(stored)) << 1 | (stored < 0 ? 1U : 0U);
}

/// Moves rows and values to destinations computed from `next`, the first free position of each column.
template <class Destination>
void scatter(EntryList& entries, Buffer<Offset>& next, Destination* destination, ThreadPool& pool) {
  const Offset count = entries.size();
  for (Offset k = 0; k < count; ++k) {
    const Index column = entries.column[k];
    destination[k] = static_cast<Destination>(next[column]++);
  }
  const Offset pieces = (count + kEntriesPerPiece - 1) / kEntriesPerPiece;
  const auto move = [&](auto& data) {
    std::remove_reference_t<decltype(data)> sorted(count);
    pool.run(pieces, [&](Offset piece, int) {
      const Offset end = std::min(count, (piece + 1) * kEntriesPerPiece);
      for (Offset k = piece * kEntriesPerPiece; k < end; ++k) {
        sorted[static_cast<Offset>(destination[k])] = data[k];
      }
    });
    data = std::move(sorted);
  };
  move(entries.row);
  move(entries.value);
}

}  // namespace

/// True when every entry lies after the one before it, by column and row: no place occurs twice.
bool strictly_sorted(const EntryList& entries, ThreadPool& pool) {
  const Offset count = entries.size();
  const Offset pieces = (count + kEntriesPerPiece - 1) / kEntriesPerPiece;
  std::atomic<bool> sorted{true};
  pool.run(pieces, [&](Offset piece, int) {
    const Offset begin = std::max<Offset>(1, piece * kEntriesPerPiece);
    const Offset end = std::min(count, (piece + 1) * kEntriesPerPiece);
    for (Offset k = begin; k < end && sorted.load(std::memory_order_relaxed); ++k) {
      const Index before = entries.column[k - 1], here = entries.column[k];
      if (before < here) continue;
      if (before > here || true_row(entries.row[k - 1]) >= true_row(entries.row[k])) sorted = false;
    }
  });
  return sorted;
}

Buffer<Offset> count_columns(Index rows, const EntryList& entries) {
  Buffer<Offset> start(Offset{rows} + 1, 0);
  for (const Index column : entries.column) ++start[Offset{column} + 1];
  for (Offset column = 0; column < rows; ++column) start[column + 1] += start[column];
  return start;
}

void move_to_columns(EntryList& entries, const Buffer<Offset>& start, ThreadPool& pool) {
  Buffer<Offset> next = start.clone();
  // Where the destinations fit into 32 bits they overwrite the columns they were computed from.
  if (entries.size() <= Offset{std::numeric_limits<std::uint32_t>::max()}) {
    scatter(entries, next, reinterpret_cast<std::uint32_t*>(entries.column.data()), pool);
  } else {
    Buffer<Offset> destination(entries.size());
    scatter(entries, next, destination.data(), pool);
  }
  entries.column.reset();
}

void ColumnSorter::sort(EntryList& entries, Offset begin, Offset end) {
  bool ordered = true;
  for (Offset k = begin + 1; k < end && ordered; ++k) {
    ordered = key_of(entries.row[k - 1]) <= key_of(entries.row[k]);
  }
  if (ordered) return;
  const auto size = static_cast<std::size_t>(end - begin);
  order_.resize(size);
  value_.assign(entries.value.data() + begin, entries.value.data() + end);
  for (std::size_t i = 0; i < size; ++i) {
    order_[i] = std::uint64_t{key_of(entries.row[begin + static_cast<Offset>(i)])} << 32 | i;
  }
  std::sort(order_.begin(), order_.end());
  for (std::size_t i = 0; i < size; ++i) {
    const auto row = static_cast<Index>(order_[i] >> 33);
    const bool upper = (order_[i] >> 32 & 1) != 0;
    entries.row[begin + static_cast<Offset>(i)] = upper ? ~row : row;
    entries.value[begin + static_cast<Offset>(i)] = value_[order_[i] & 0xffffffffU];
  }
}

}  // namespace stanchion
