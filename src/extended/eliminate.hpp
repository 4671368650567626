// Eliminates the pivots of one front in any scalar: threshold partial pivoting, panel by panel.
#pragma once

#include <vector>

#include "base/buffer.hpp"
#include "base/threads.hpp"
#include "dense/block_lower.hpp"
#include "dense/kernels.hpp"
#include "extended/kernels.hpp"

namespace stanchion {

/// A dense symmetric matrix by its lower triangle: one BlockLower a plane, one after the other. Not owned.
template <class Scalar>
struct ScalarBlock {
  BlockLayout layout;
  double* data = nullptr;

  static Offset doubles(const BlockLayout& layout) { return ScalarTraits<Scalar>::planes * layout.size(); }
  Strip<Scalar> column(Index row, Index number) const {
    return {data + layout.offset(row, number), layout.size()};
  }
  Scalar get(Index row, Index number) const { return load(column(row, number), 0); }
  void set(Index row, Index number, Scalar x) const { store(column(row, number), 0, x); }
};

/// Rows [0, candidates) of `matrix` may be eliminated, the rest only updated. Nothing is owned. The arrays
/// have one element a row (`image`: one a row and plane) and are permuted along; `row_error` and
/// `image_error` are only permuted, `growth` gets row sums of |L||D||L^T|, `image` the front's share of L D
/// L^T x.
template <class Scalar>
struct ScalarFront {
  ScalarBlock<Scalar>
      matrix;  ///< in: assembled; out: Schur complement in the rows and columns not eliminated
  Index candidates = 0;
  PivotKind* kind = nullptr;   ///< room for `candidates`
  Scalar* diagonal = nullptr;  ///< room for `candidates`; of 1x1 pivots
  Index* label = nullptr;
  double* row_error = nullptr;
  double* growth = nullptr;
  double* sign = nullptr;  ///< x, +1 or -1 a row
  Strip<Scalar> image;
  double* image_error = nullptr;
};

struct ScalarOptions {
  bool definite = false;    ///< pivots in the order given; stop at the first that is not positive
  double threshold = 0.01;  ///< multipliers stay below 1 / threshold (not when definite)
  bool keep_lower = false;  ///< leave L below its diagonal, and D on and beside it, in the columns eliminated
};

struct ScalarElimination {
  Index eliminated = 0;     ///< leading rows that became pivots; the others wait for the parent
  bool stopped = false;     ///< definite only: a pivot was not positive (or too small to divide by)
  bool not_finite = false;  ///< definite only: overflow, or a pivot too large to divide by
  Offset two_by_two = 0;
  double largest_pivot = 0;  ///< |entry| of D
  double largest_sum = 1;    ///< column sum of |L|
};

constexpr Index kExtendedPanel = 32;  ///< most pivots applied to the rest of a front together

/// Scratch of one worker, grown on demand.
struct ScalarScratch {
  Buffer<double> scaled;  ///< W = L D of the current panel
};

/// A 1x1 pivot is taken where |d| >= threshold |column|, else a 2x2 pivot with the largest entry of the
/// column among the candidates at hand, where the diagonals are at most kTwoByTwoShare of it (its determinant
/// is then negative without computing it) and the multipliers stay below 1 / threshold (Duff and Reid, ACM
/// TOMS 9 (1983)). A column that is exactly zero is a zero pivot. Nothing is perturbed. `threshold` 0 to
/// 0.35: then every candidate is taken when no row lies below, unless entries leave [2^-900, 2^900]. `team`
/// null: this thread alone; same bits either way. Cost: order^2 x candidates / 2 products.
template <class Scalar>
ScalarElimination eliminate_scalar_front(const ScalarFront<Scalar>& front, const ScalarOptions& options,
                                         ScalarScratch& scratch, ThreadPool* team);

}  // namespace stanchion
