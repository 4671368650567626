// The small vocabulary of loops that are compiled once per instruction set and chosen at run time.
#pragma once

#include <cstdint>
#include <string>

#include "dense/rounding.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// What a pivot of D is. A 2x2 pivot takes two neighbouring columns.
enum class PivotKind : std::uint8_t { kOne, kTwoFirst, kTwoSecond, kZero };

/// The pivots of a run of columns: diagonal[k] is D_kk, off_diagonal[k] is D_(k+1,k) where kind[k] is
/// kTwoFirst.
struct PivotArrays {
  double* diagonal;
  double* off_diagonal;
  PivotKind* kind;
};

constexpr Index kTileWidth = 64;  ///< most columns a tile may have

/// Most rows of a strip.
template <class Scalar>
constexpr Index most_row_strip() {
  return 24 * static_cast<Index>(sizeof(double) / sizeof(Scalar));
}

/// Diagonals of a 2x2 pivot stay below this share of its off-diagonal entry; then the explicit solve below is
/// backward stable (see src/inertia/error_bound.md, section 2x2).
constexpr double kTwoByTwoShare = 0.6404;  // (1 + sqrt 17) / 8, Bunch and Parlett

/// One set of kernels. All matrices are column-major; nothing allocates; pointers must not overlap unless
/// said.
template <class Scalar>
struct KernelSet {
  const char* isa;
  Index row_strip;     ///< rows of a strip of a left operand; divides most_row_strip<Scalar>()
  Index column_strip;  ///< rows of a strip of a right operand; divides row_strip
  Index lanes;         ///< rows of a register: a right operand has room for whole registers of rows

  /// Unpivoted L D L^T of a tile of `width` <= kTileWidth columns. In: lower triangle of `tile`. Out: below
  /// the diagonal L, above it (row k, column i) the undivided multiplier w = l_ik d_k, pivots into `pivots`.
  /// Stops before the first column whose pivot is below kLeastPivot (in magnitude, unless `definite`), not
  /// finite, or, unless `definite`, has a multiplier above `growth_limit`. Returns the number of columns
  /// eliminated; the pivot refused stands on the diagonal.
  Index (*factor_tile)(Scalar* tile, Index leading, Index width, bool definite, double growth_limit,
                       PivotArrays pivots);

  /// L D L^T with complete pivoting inside the tile (Bunch and Parlett, SIAM J. Numer. Anal. 8 (1971)). In:
  /// lower triangle. Out as factor_tile, in the permuted order: column k of the result was column
  /// permutation[k]. Stops early when everything left is below kLeastPivot or not finite.
  Index (*factor_tile_pivoted)(Scalar* tile, Index leading, Index width, PivotArrays pivots,
                               Index* permutation);

  /// inverse = L^-1 for unit lower triangular L (diagonal not read), upper triangle set to zero. Column by
  /// column forward substitution: |L inverse - I| <= gamma_width |L||inverse|.
  void (*invert_unit_lower)(const Scalar* lower, Index leading, Index width, Scalar* inverse,
                            Index leading_inverse);

  /// row_sum[i] += sum_k |a_ik| weight[k]; when column_sum is not null also column_sum[k] += sum_i |a_ik|.
  void (*weighted_abs_sums)(const Scalar* a, Index leading, Index rows, Index columns, const Scalar* weight,
                            Scalar* row_sum, Scalar* column_sum);

  /// Copies `count` entries forward (destination may lie below source and overlap it), adds |entry| to
  /// row_sum and returns the sum of |entry|.
  Scalar (*copy_with_abs_sums)(const Scalar* source, Index count, Scalar* destination, Scalar* row_sum);

  // Products take packed operands. A left operand is cut into strips of row_strip rows, a right one into
  // strips of column_strip rows; strip s starts at s stride and holds, one column after the other, the
  // entries of its rows side by side. Rows that do not exist, up to the end of a strip and of a register, are
  // zeros.

  /// Packs `rows` rows of `depth` columns as a left operand. Cost: one copy.
  void (*pack_left)(const Scalar* source, Index leading, Index rows, Index depth, Scalar* packed,
                    Index stride);
  /// The same as a right operand.
  void (*pack_right)(const Scalar* source, Index leading, Index rows, Index depth, Scalar* packed,
                     Index stride);

  /// W = A F for the upper triangular F whose transpose `factor` is, packed as a right operand of stride
  /// kTileWidth column_strip: W is `rows` x `width` (at most kTileWidth), itself a right operand, whose
  /// columns to the next multiple of column_strip are overwritten too. Every entry is one sum.
  void (*multiply_by_upper)(const Scalar* a, Index leading, Index rows, const Scalar* factor, Index width,
                            Scalar* w, Index stride);

  /// C_ij -= sum_p left_ip right_jp for first_row + i >= j >= first_column; entries above that diagonal may
  /// be overwritten, columns before first_column not. Every sum is formed apart, in any order, and subtracted
  /// once. Cost: `depth` multiply-adds an entry.
  void (*subtract_product)(const Scalar* left, Index left_stride, const Scalar* right, Index right_stride,
                           Index depth, Index rows, Index columns, Index first_row, Index first_column,
                           Scalar* c, Index leading);

  /// out[k] = max_i |w_ik| over a right operand; a NaN or an infinity anywhere makes it infinite.
  void (*strips_abs_max)(const Scalar* w, Index stride, Index rows, Index columns, Scalar* out);

  /// L = W D^-1 row by row, from a right operand to a left one, and to column-major `plain` unless that is
  /// null; abs_sum[k] += sum_i |l_ik| and signed_sum[k] += sum_i l_ik sign_i, the latter through at most
  /// signed_sum_depth(rows) additions one after the other.
  void (*divide_strips)(const Scalar* w, Index stride, Index rows, Index columns, PivotArrays pivots,
                        const Scalar* sign, Scalar* left, Index left_stride, Scalar* plain, Index leading,
                        Scalar* abs_sum, Scalar* signed_sum);

  /// growth[i] += sum_k |l_ik| weight[k] and image[i] += sum_k l_ik step[k] over a left operand, the latter
  /// in image_additions(columns) additions of sums of at most four products.
  void (*strips_growth_and_image)(const Scalar* left, Index stride, Index rows, Index columns,
                                  const Scalar* weight, const Scalar* step, Scalar* growth, Scalar* image);
};

using Kernels = KernelSet<double>;

/// In double, see Rounding.
constexpr double kLeastPivot = Rounding<double>::kLeastPivot;

/// Longest path of additions through a signed column sum of divide_strips.
constexpr Index signed_sum_depth(Index rows) {
  return rows / 2 + 11;
}

/// Additions to one row by strips_growth_and_image.
constexpr Index image_additions(Index columns) {
  return columns / 4 + columns % 4;
}

/// The best set this processor can run, or what use_kernels() chose, for double or float. Thread safe.
template <class Scalar>
const KernelSet<Scalar>& kernels_of();
template <>
const KernelSet<double>& kernels_of<double>();
template <>
const KernelSet<float>& kernels_of<float>();
inline const Kernels& kernels() {
  return kernels_of<double>();
}

/// From now on kernels_of() is `set`, which must outlive all use: the reference set repeats a claim by other
/// code, and tests put their own in. Call before any other work.
void use_kernels(const KernelSet<double>& set);
void use_kernels(const KernelSet<float>& set);

/// The plain reference set, always available; the tests hold the others against it.
template <class Scalar>
const KernelSet<Scalar>& reference_kernels_of();
template <>
const KernelSet<double>& reference_kernels_of<double>();
template <>
const KernelSet<float>& reference_kernels_of<float>();
inline const Kernels& reference_kernels() {
  return reference_kernels_of<double>();
}

/// Every set this processor can run, the reference first. For tests and benchmarks.
int kernel_sets(const KernelSet<double>* sets[3]);
int kernel_sets(const KernelSet<float>* sets[3]);

}  // namespace stanchion
