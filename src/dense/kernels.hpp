// The small vocabulary of loops that are compiled once per instruction set and chosen at run time.
#pragma once

#include <cstdint>
#include <string>

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

constexpr Index kTileWidth = 64;     ///< most columns a tile may have
constexpr Index kMostRowStrip = 24;  ///< most rows of a strip

/// Diagonals of a 2x2 pivot stay below this share of its off-diagonal entry; then the explicit solve below is
/// backward stable (see src/inertia/error_bound.md, section 2x2).
constexpr double kTwoByTwoShare = 0.6404;  // (1 + sqrt 17) / 8, Bunch and Parlett

/// Pivots below this are never divided by: their reciprocal could overflow. In a scaled matrix they are
/// noise.
constexpr double kLeastPivot = 0x1p-900;

/// One set of kernels. All matrices are column-major; nothing allocates; pointers must not overlap unless
/// said.
struct Kernels {
  const char* isa;
  Index row_strip;     ///< rows of a strip of a left operand; divides kMostRowStrip
  Index column_strip;  ///< rows of a strip of a right operand; divides row_strip

  /// Unpivoted L D L^T of a tile of `width` <= kTileWidth columns. In: lower triangle of `tile`. Out: below
  /// the diagonal L, above it (row k, column i) the undivided multiplier w = l_ik d_k, pivots into `pivots`.
  /// Stops before the first column whose pivot is below kLeastPivot (in magnitude, unless `definite`), not
  /// finite, or, unless `definite`, has a multiplier above `growth_limit`. Returns the number of columns
  /// eliminated.
  Index (*factor_tile)(double* tile, Index leading, Index width, bool definite, double growth_limit,
                       PivotArrays pivots);

  /// L D L^T with complete pivoting inside the tile (Bunch and Parlett, SIAM J. Numer. Anal. 8 (1971)). In:
  /// lower triangle. Out as factor_tile, in the permuted order: column k of the result was column
  /// permutation[k]. Stops early when everything left is below kLeastPivot or not finite.
  Index (*factor_tile_pivoted)(double* tile, Index leading, Index width, PivotArrays pivots,
                               Index* permutation);

  /// inverse = L^-1 for unit lower triangular L (diagonal not read), upper triangle set to zero. Column by
  /// column forward substitution: |L inverse - I| <= gamma_width |L||inverse|.
  void (*invert_unit_lower)(const double* lower, Index leading, Index width, double* inverse,
                            Index leading_inverse);

  /// row_sum[i] += sum_k |a_ik| weight[k]; when column_sum is not null also column_sum[k] += sum_i |a_ik|.
  void (*weighted_abs_sums)(const double* a, Index leading, Index rows, Index columns, const double* weight,
                            double* row_sum, double* column_sum);

  /// Copies `count` entries forward (destination may lie below source and overlap it), adds |entry| to
  /// row_sum and returns the sum of |entry|.
  double (*copy_with_abs_sums)(const double* source, Index count, double* destination, double* row_sum);

  // Products take packed operands. A left operand is cut into strips of row_strip rows, a right one into
  // strips of column_strip rows; strip s starts at s stride and holds, one column after the other, the
  // entries of its rows side by side. Rows that do not exist are zeros.

  /// Packs `rows` rows of `depth` columns as a left operand. Cost: one copy.
  void (*pack_left)(const double* source, Index leading, Index rows, Index depth, double* packed,
                    Index stride);
  /// The same as a right operand.
  void (*pack_right)(const double* source, Index leading, Index rows, Index depth, double* packed,
                     Index stride);

  /// W = A F for the upper triangular F whose transpose `factor` is, packed as a right operand of stride
  /// kTileWidth column_strip: W is `rows` x `width` (at most kTileWidth), itself a right operand, whose
  /// columns to the next multiple of column_strip are overwritten too. Every entry is one sum.
  void (*multiply_by_upper)(const double* a, Index leading, Index rows, const double* factor, Index width,
                            double* w, Index stride);

  /// C_ij -= sum_p left_ip right_jp for first_row + i >= j >= first_column; entries above that diagonal may
  /// be overwritten, columns before first_column not. Every sum is formed apart, in any order, and subtracted
  /// once. Cost: `depth` multiply-adds an entry.
  void (*subtract_product)(const double* left, Index left_stride, const double* right, Index right_stride,
                           Index depth, Index rows, Index columns, Index first_row, Index first_column,
                           double* c, Index leading);

  /// out[k] = max_i |w_ik| over a right operand; a NaN or an infinity anywhere makes it infinite.
  void (*strips_abs_max)(const double* w, Index stride, Index rows, Index columns, double* out);

  /// L = W D^-1 row by row, from a right operand to a left one, and to column-major `plain` unless that is
  /// null; abs_sum[k] += sum_i |l_ik| and signed_sum[k] += sum_i l_ik sign_i, the latter through at most
  /// signed_sum_depth(rows) additions one after the other.
  void (*divide_strips)(const double* w, Index stride, Index rows, Index columns, PivotArrays pivots,
                        const double* sign, double* left, Index left_stride, double* plain, Index leading,
                        double* abs_sum, double* signed_sum);

  /// growth[i] += sum_k |l_ik| weight[k] and image[i] += sum_k l_ik step[k] over a left operand, the latter
  /// in image_additions(columns) additions of sums of at most four products.
  void (*strips_growth_and_image)(const double* left, Index stride, Index rows, Index columns,
                                  const double* weight, const double* step, double* growth, double* image);
};

/// Longest path of additions through a signed column sum of divide_strips.
constexpr Index signed_sum_depth(Index rows) {
  return rows / 2 + 11;
}

/// Additions to one row by strips_growth_and_image.
constexpr Index image_additions(Index columns) {
  return columns / 4 + columns % 4;
}

/// The best set this processor can run, or what use_kernels() chose. Thread safe.
const Kernels& kernels();

/// From now on kernels() is `set`, which must outlive all use: the reference set repeats a claim by other
/// code, and tests put their own in. Call before any other work.
void use_kernels(const Kernels& set);

/// The plain reference set, always available; the tests hold the others against it.
const Kernels& reference_kernels();

/// Every set this processor can run, the reference first. For tests and benchmarks.
int kernel_sets(const Kernels* sets[3]);

}  // namespace stanchion
