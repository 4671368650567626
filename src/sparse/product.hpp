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
  const Offset begin = family.column_start[column], end = family.column_start[Offset{column} + 1];
  // Held here, so that what `use` writes does not make them be read again.
  const Index* rows = family.row.data();
  const double offset = matrix.offset;
  const auto all = [&](const auto& entry) {
    for (Offset k = begin; k < end; ++k) {
      const Index row = rows[k];
      use(row, entry(k, row) - (row == column ? offset : 0.0));
    }
  };
  if (family.values.size() > 1) return all([&](Offset k, Index row) { return matrix.entry(k, row, column); });
  const double *values = family.values[0].data(), *scale = matrix.scale->data();
  const double coefficient = matrix.coefficients[0], own = scale[column];
  all([=](Offset k, Index row) { return coefficient * values[k] * (scale[row] * own); });
}

/// y = A x for the matrix as formed (scaled, offset included). Cost: one pass over the entries.
void multiply(const ShiftedMatrix& matrix, std::span<const double> x, std::span<double> y);

/// y_i = sum_j |a_ij| |x_j|.
void multiply_absolute(const ShiftedMatrix& matrix, std::span<const double> x, std::span<double> y);

/// Largest row sum of |A|. Cost: one pass over the entries, half of them by each of two threads of `pool`.
double infinity_norm(const ShiftedMatrix& matrix, ThreadPool* pool = nullptr);

}  // namespace stanchion
