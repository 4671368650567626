// Several matrices on the union of their patterns: a pencil, or a sum with stated factors.
#pragma once

#include <algorithm>
#include <span>
#include <vector>

#include "base/buffer.hpp"
#include "base/threads.hpp"
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
/// entries, by all threads of `pool` if there is one; the same result for any number of them.
MatrixFamily unite(std::span<const SymmetricMatrix* const> members, ThreadPool* pool = nullptr);

/// The family of one matrix, whose arrays it takes over when each column has its diagonal entry.
MatrixFamily family_of(SymmetricMatrix matrix);

/// The family with equation i renamed position_of[i]. Columns come out ascending in column, rows in no order
/// but the same for any number of threads. Cost: one counting pass and one scatter; memory: a number a row
/// and thread.
MatrixFamily permute(const MatrixFamily& family, const Buffer<Index>& position_of,
                     ThreadPool* pool = nullptr);

/// Calls work(first, last, piece) for `pieces` ranges of columns of about as many entries each, by the
/// threads of `pool`; one range and no thread for small families. For sums and maxima whose order does not
/// matter.
template <class Work>
void for_column_ranges(ThreadPool* pool, Index columns, const Buffer<Offset>& column_start, int pieces,
                       const Work& work) {
  const auto bound = [&](Offset piece) {
    if (piece == pieces) return columns;
    const Offset wanted = column_start[columns] / pieces * piece;
    return static_cast<Index>(std::lower_bound(column_start.begin(), column_start.begin() + columns, wanted) -
                              column_start.begin());
  };
  const auto run = [&](Offset piece, int) { work(bound(piece), bound(piece + 1), static_cast<int>(piece)); };
  if (pool != nullptr && pieces > 1) return pool->run(pieces, run);
  for (Offset piece = 0; piece < pieces; ++piece) run(piece, 0);
}

/// How many ranges pay: one a thread, and one alone below some hundred thousand entries.
int column_ranges(ThreadPool* pool, Offset entries);

/// work(first, last, half) for the two halves of the columns, of about as many entries: by two threads of
/// `pool` if there are any. The halves are the same either way, and so are the bits of what is summed in
/// each.
template <class Work>
void for_column_halves(ThreadPool* pool, Index columns, const Buffer<Offset>& column_start,
                       const Work& work) {
  for_column_ranges(pool, columns, column_start, 2, work);
}

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

  /// Error of an exact entry: a possible underflow when scaling.
  static constexpr double kExactError = 0x1p-1074;
  /// Bound on the rounding of entry(k): products, additions, and a possible underflow when scaling.
  double entry_error(Offset k, Index row, Index column) const;

  /// True when every entry is exact: one member with coefficient 1 or -1.
  bool exact() const { return coefficients.size() == 1 && (coefficients[0] == 1 || coefficients[0] == -1); }
};

}  // namespace stanchion
