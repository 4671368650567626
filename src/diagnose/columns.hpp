// A few long vectors side by side, and small dense matrices of their products.
#pragma once

#include <cstddef>
#include <vector>

#include "base/long_vector.hpp"
#include "numeric/block_kernels.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// `count` vectors (a multiple of kBlockVectors) of `rows` entries, stored row by row.
struct Columns {
  Index rows = 0, count = 0;
  LongVector<double> values;

  Columns() = default;
  Columns(Index row_count, Index columns)
      : rows(row_count),
        count(columns),
        values(static_cast<std::size_t>(row_count) * static_cast<std::size_t>(columns), 0.0) {}

  double* row(Index i) { return values.data() + Offset{i} * count; }
  const double* row(Index i) const { return values.data() + Offset{i} * count; }
};

/// `number` rounded up to a whole number of blocks.
inline Index whole_blocks(Index number) {
  return (number + kBlockVectors - 1) / kBlockVectors * kBlockVectors;
}

/// Calls use(block) on a copy of every eight columns, each kBlockVectors doubles a row, and puts the block
/// back. `block`: space for it, kept by whoever calls often.
template <class Use>
void each_block(Columns& columns, LongVector<double>& block, const Use& use) {
  if (columns.count == kBlockVectors) {
    use(columns.values.data());
    return;
  }
  block.resize(static_cast<std::size_t>(columns.rows) * kBlockVectors);
  for (Index first = 0; first < columns.count; first += kBlockVectors) {
    for (Index i = 0; i < columns.rows; ++i) {
      const double* from = columns.row(i) + first;
      double* to = block.data() + Offset{i} * kBlockVectors;
      for (Index v = 0; v < kBlockVectors; ++v) to[v] = from[v];
    }
    use(block.data());
    for (Index i = 0; i < columns.rows; ++i) {
      const double* from = block.data() + Offset{i} * kBlockVectors;
      double* to = columns.row(i) + first;
      for (Index v = 0; v < kBlockVectors; ++v) to[v] = from[v];
    }
  }
}

}  // namespace stanchion
