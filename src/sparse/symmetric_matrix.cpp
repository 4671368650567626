#include "sparse/symmetric_matrix.hpp"

#include <algorithm>
#include <cmath>

namespace stanchion {

bool check_invariants(const SymmetricMatrix& matrix) {
  const Index n = matrix.rows;
  if (n < 0 || matrix.column_start.size() != Offset{n} + 1 || matrix.column_start[0] != 0) return false;
  if (matrix.row.size() != matrix.column_start[n] || matrix.value.size() != matrix.row.size()) return false;
  for (Index column = 0; column < n; ++column) {
    const Offset begin = matrix.column_start[column], end = matrix.column_start[Offset{column} + 1];
    if (begin > end || end > matrix.row.size()) return false;
    for (Offset k = begin; k < end; ++k) {
      const Index least = k == begin ? column : matrix.row[k - 1] + 1;
      if (matrix.row[k] < least || matrix.row[k] >= n || !std::isfinite(matrix.value[k])) return false;
    }
  }
  return true;
}

SymmetricMatrix from_triplets(Index rows, const std::vector<Triplet>& triplets) {
  std::vector<Triplet> lower = triplets;
  for (auto& entry : lower) {
    if (entry.row < entry.column) std::swap(entry.row, entry.column);
  }
  std::stable_sort(lower.begin(), lower.end(), [](const Triplet& a, const Triplet& b) {
    return a.column != b.column ? a.column < b.column : a.row < b.row;
  });
  const auto count = static_cast<Offset>(lower.size());
  SymmetricMatrix matrix{rows, Buffer<Offset>(Offset{rows} + 1, 0), Buffer<Index>(count),
                         Buffer<double>(count)};
  Offset used = 0;
  for (std::size_t k = 0; k < lower.size(); ++k) {
    const Triplet& entry = lower[k];
    if (k > 0 && lower[k - 1].row == entry.row && lower[k - 1].column == entry.column) {
      matrix.value[used - 1] += entry.value;
      continue;
    }
    matrix.row[used] = entry.row;
    matrix.value[used] = entry.value;
    ++used;
    ++matrix.column_start[Offset{entry.column} + 1];
  }
  for (Index column = 0; column < rows; ++column) {
    matrix.column_start[Offset{column} + 1] += matrix.column_start[column];
  }
  matrix.row.shrink(used);
  matrix.value.shrink(used);
  return matrix;
}

}  // namespace stanchion
