// Products with the data in double-double, for blocks of eight vectors.
#pragma once

#include "base/threads.hpp"
#include "numeric/block_kernels.hpp"
#include "sparse/matrix_family.hpp"

namespace stanchion {

/// b = A y for the scaled, shifted matrix, straight from the entries and coefficients as read, accumulated in
/// double-double and rounded once: |b - A y| <= u |b| + (8 (q + m + 8) u^2 |A| + U)|y|, q the most entries of
/// a row, m the members of the sum, u = 2^-53, U what products of coefficients and entries lose to underflow.
/// `y` and `b`: kBlockVectors doubles a row, rows in the family's order; they may not overlap. Same bits for
/// any number of threads. Cost: some 30 operations an entry, each on eight vectors; memory: 32 kBlockVectors
/// bytes a row twice.
void extended_times(const ShiftedMatrix& matrix, const double* y, double* b, ThreadPool& pool);

/// The same in `memory`, made large enough if it is not: for whoever calls often.
void extended_times(const ShiftedMatrix& matrix, const double* y, double* b, Buffer<double>& memory,
                    ThreadPool& pool);

/// Size of a matrix for error bounds.
struct AbsoluteNorm {
  double norm = 0;         ///< at least || sum_t |c_t| S |A_t| S + |offset| I ||_inf
  Offset longest_row = 0;  ///< most entries of a row
  Index members = 1;       ///< of the sum that makes an entry
  double underflow = 0;    ///< at least || U ||_inf

  /// Bound on || b - A y || / || y || by extended_times(), but for the u |b| of its last rounding.
  double product_error() const {
    return 8 * static_cast<double>(longest_row + members + 8) * 0x1p-106 * norm + underflow;
  }
};
AbsoluteNorm absolute_norm(const ShiftedMatrix& matrix, ThreadPool& pool);

}  // namespace stanchion
