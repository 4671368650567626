// Products and norms of a shifted, scaled family.
#pragma once

#include <span>

#include "sparse/matrix_family.hpp"

namespace stanchion {

/// Calls use(row, entry) for the entries of one column of the lower triangle as formed (scaled, offset
/// included).
template <class Use>
void for_column_entries(const ShiftedMatrix& matrix, Index column, const Use& use) {
  const MatrixFamily& family = *matrix.family;
  for (Offset k = family.column_start[column]; k < family.column_start[Offset{column} + 1]; ++k) {
    const Index row = family.row[k];
    use(row, matrix.entry(k, row, column) - (row == column ? matrix.offset : 0.0));
  }
}

/// y = A x for the matrix as formed (scaled, offset included). Cost: one pass over the entries.
void multiply(const ShiftedMatrix& matrix, std::span<const double> x, std::span<double> y);

/// y_i = sum_j |a_ij| |x_j|.
void multiply_absolute(const ShiftedMatrix& matrix, std::span<const double> x, std::span<double> y);

/// Largest row sum of |A|. Cost: one pass over the entries, half of it by each of two threads of `pool`.
double infinity_norm(const ShiftedMatrix& matrix, ThreadPool* pool = nullptr);

}  // namespace stanchion
