#include "numeric/block_columns.hpp"

#include <cmath>
#include <vector>

#include "base/ranges.hpp"

namespace stanchion {

ColumnSums column_dots(const double* a, const double* b, Offset rows, ThreadPool& pool) {
  constexpr Offset kV = kBlockVectors;
  std::vector<ColumnSums> partial(static_cast<std::size_t>(rows / kBlockRowsAPiece + 1), ColumnSums{});
  for_ranges(pool, rows, kBlockRowsAPiece, [&](Offset begin, Offset end) {
    ColumnSums sums{};
    for (Offset i = begin * kV; i < end * kV; i += kV) {
      for (Offset v = 0; v < kV; ++v) sums[static_cast<std::size_t>(v)] += a[i + v] * b[i + v];
    }
    partial[static_cast<std::size_t>(begin / kBlockRowsAPiece)] = sums;
  });
  ColumnSums sums{};
  for (const ColumnSums& some : partial) {
    for (std::size_t v = 0; v < sums.size(); ++v) sums[v] += some[v];
  }
  return sums;
}

ColumnSums column_norms(const double* block, Offset rows, ThreadPool& pool) {
  ColumnSums sums = column_dots(block, block, rows, pool);
  for (double& s : sums) s = std::sqrt(s) * 1.000001;
  return sums;
}

}  // namespace stanchion
