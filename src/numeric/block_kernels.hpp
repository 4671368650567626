// Loops over blocks of eight vectors at once, compiled once per instruction set: triangular solves read the
// factor once for all eight, and the extended product of the data forms each coefficient once.
#pragma once

#include "stanchion/types.hpp"

namespace stanchion {

/// Vectors worked on together. A block of n rows is stored row by row: kBlockVectors doubles a row.
constexpr Index kBlockVectors = 8;

/// Rows of the data's lower triangle, as the extended product needs them.
struct DataColumns {
  const Offset* column_start;
  const Index* row;
  const double* const* values;  ///< one array per member
  const double* coefficients;   ///< one per member
  Index members;
};

/// The loops over a panel of L and over its triangle, for L in either precision; sums are in double.
template <class Scalar>
struct PanelKernels {
  /// y_i += sum_(k < columns) l_ik x_k for `rows` rows; columns <= 64. The sum is formed apart and added
  /// once.
  void (*times_block)(const Scalar* lower, Index leading, Index rows, Index columns, const double* x,
                      double* y);

  /// out_k += sum_(i < rows) l_ik x_i for `columns` columns; rows <= 512. Each sum is formed apart, added
  /// once.
  void (*transposed_times_block)(const Scalar* lower, Index leading, Index rows, Index columns,
                                 const double* x, double* out);

  /// x := L^-1 x for the unit lower triangle of `columns` columns; no entry takes part in more additions one
  /// after another than there are columns and two.
  void (*solve_triangle)(const Scalar* lower, Index leading, Index columns, double* x);

  /// x := L^-T (x - sums) for the same triangle, row k of `sums` being added to before it is taken off; the
  /// same number of additions.
  void (*solve_transposed_triangle)(const Scalar* lower, Index leading, Index columns, const double* sums,
                                    double* x);
};

struct BlockKernels {
  PanelKernels<double> of_double;
  PanelKernels<float> of_single;

  const PanelKernels<double>& panel(const double*) const { return of_double; }
  const PanelKernels<float>& panel(const float*) const { return of_single; }

  /// (high + low) += A y over columns [begin, end) of the lower triangle, both triangles, in double-double:
  /// every coefficient sum_t c_t v_t, every product and every addition carries a relative error of at most 8
  /// 2^-106.
  void (*extended_product)(const DataColumns& data, Index begin, Index end, const double* y, double* high,
                           double* low);
};

/// The best set this processor can run.
const BlockKernels& block_kernels();

/// The plain reference set.
const BlockKernels& reference_block_kernels();

}  // namespace stanchion
