// Several matrices on the union of their patterns: a pencil, or a sum with stated factors.
#pragma once

#include <span>
#include <vector>

#include "base/buffer.hpp"
#include "sparse/symmetric_matrix.hpp"

namespace stanchion {

/// Lower triangle by columns, one value array per member; every diagonal entry is present (zero where no
/// member has one). Rows within a column need not ascend after permute().
struct MatrixFamily {
  Index rows = 0;
  Buffer<Offset> column_start;
  Buffer<Index> row;
  std::vector<Buffer<double>> values;

  Offset entries() const { return row.size(); }
};

/// The union of the patterns of `members` (all of the same size, at least one). Cost: one merge over the
/// entries.
MatrixFamily unite(std::span<const SymmetricMatrix* const> members);

/// The family with equation i renamed position_of[i]. Columns come out ascending in column, rows in no order.
/// Cost: one counting pass and one scatter.
MatrixFamily permute(const MatrixFamily& family, const Buffer<Index>& position_of);

/// S (sum_t coefficients[t] values[t]) S - offset I, with S = diag(2^scale_exponent).
struct ShiftedMatrix {
  const MatrixFamily* family = nullptr;
  std::vector<double> coefficients;       ///< one per member
  const Buffer<double>* scale = nullptr;  ///< powers of two, one per row
  double offset = 0;

  /// One entry as stored in the front, before the offset; `k` is its place in the family's arrays.
  double entry(Offset k, Index row, Index column) const {
    double sum = coefficients[0] * family->values[0][k];
    for (std::size_t t = 1; t < coefficients.size(); ++t) sum += coefficients[t] * family->values[t][k];
    return sum * ((*scale)[row] * (*scale)[column]);  // one exact power of two: at most one underflow
  }

  /// Bound on the rounding of entry(k): products, additions, and a possible underflow when scaling.
  double entry_error(Offset k, Index row, Index column) const;

  /// True when every entry is exact: one member with coefficient 1 or -1.
  bool exact() const { return coefficients.size() == 1 && (coefficients[0] == 1 || coefficients[0] == -1); }
};

}  // namespace stanchion
