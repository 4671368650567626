// The small vocabulary of loops that are compiled once per instruction set and chosen at run time.
#pragma once

#include <cstdint>
#include <string>

#include "stanchion/types.hpp"

namespace stanchion {

/// What a pivot of D is. A 2x2 pivot takes two neighbouring columns.
enum class PivotKind : std::uint8_t { kOne, kTwoFirst, kTwoSecond, kZero };

/// The pivots of a run of columns: diagonal[k] is D_kk, off_diagonal[k] is D_(k+1,k) where kind[k] is kTwoFirst.
struct PivotArrays {
  double* diagonal;
  double* off_diagonal;
  PivotKind* kind;
};

constexpr Index kTileWidth = 64;  ///< most columns a tile may have

/// Diagonals of a 2x2 pivot stay below this share of its off-diagonal entry; then the explicit solve below is
/// backward stable (see src/inertia/error_bound.md, section 2x2).
constexpr double kTwoByTwoShare = 0.6404;  // (1 + sqrt 17) / 8, Bunch and Parlett

/// Pivots below this are never divided by: their reciprocal could overflow. In a scaled matrix they are noise.
constexpr double kLeastPivot = 0x1p-900;

/// One set of kernels. All matrices are column-major; nothing allocates; pointers must not overlap unless said.
struct Kernels {
  const char* isa;

  /// Unpivoted L D L^T of a tile of `width` <= kTileWidth columns. In: lower triangle of `tile`. Out: below the
  /// diagonal L, above it (row k, column i) the undivided multiplier w = l_ik d_k, pivots into `pivots`.
  /// Stops before the first column whose pivot is below kLeastPivot (in magnitude, unless `definite`), not
  /// finite, or, unless `definite`, has a multiplier above `growth_limit`. Returns the number of columns eliminated.
  Index (*factor_tile)(double* tile, Index leading, Index width, bool definite, double growth_limit,
                       PivotArrays pivots);

  /// L D L^T with complete pivoting inside the tile (Bunch and Parlett, SIAM J. Numer. Anal. 8 (1971)). In: lower
  /// triangle. Out as factor_tile, in the permuted order: column k of the result was column permutation[k].
  /// Stops early when everything left is below kLeastPivot or not finite.
  Index (*factor_tile_pivoted)(double* tile, Index leading, Index width, PivotArrays pivots, Index* permutation);

  /// inverse = L^-1 for unit lower triangular L (diagonal not read), upper triangle set to zero. Column by column
  /// forward substitution: |L inverse - I| <= gamma_width |L||inverse|.
  void (*invert_unit_lower)(const double* lower, Index leading, Index width, double* inverse, Index leading_inverse);

  /// out[k] = max_i |w_ik|; a NaN anywhere makes it infinite.
  void (*column_abs_max)(const double* w, Index leading, Index rows, Index columns, double* out);

  /// l = w D^-1 row by row; abs_sum[k] += sum_i |l_ik| and signed_sum[k] += sum_i l_ik sign_i, the latter through
  /// at most signed_sum_depth(rows) additions one after the other. `l` and `w` may not overlap.
  void (*divide_by_pivots)(const double* w, Index leading_w, double* l, Index leading_l, Index rows, Index columns,
                           PivotArrays pivots, const double* sign, double* abs_sum, double* signed_sum);

  /// row_sum[i] += sum_k |a_ik| weight[k]; when column_sum is not null also column_sum[k] += sum_i |a_ik|.
  void (*weighted_abs_sums)(const double* a, Index leading, Index rows, Index columns, const double* weight,
                            double* row_sum, double* column_sum);

  /// growth[i] += sum_k |a_ik| weight[k] and image[i] += sum_k a_ik step[k], the latter in image_additions(columns)
  /// additions of sums of at most four products.
  void (*add_growth_and_image)(const double* a, Index leading, Index rows, Index columns, const double* weight,
                               const double* step, double* growth, double* image);

  /// Copies `count` entries forward (destination may lie below source and overlap it), adds |entry| to row_sum
  /// and returns the sum of |entry|.
  double (*copy_with_abs_sums)(const double* source, Index count, double* destination, double* row_sum);
};

/// Longest path of additions through a signed column sum of divide_by_pivots.
constexpr Index signed_sum_depth(Index rows) { return rows / 2 + 11; }

/// Additions to one row by add_growth_and_image.
constexpr Index image_additions(Index columns) { return columns / 4 + columns % 4; }

/// The best set this processor can run, or what use_reference_kernels() chose. Thread safe.
const Kernels& kernels();

/// From now on kernels() is the reference set: for repeating a claim by other code. Call before any other work.
void use_reference_kernels();

/// The plain reference set, always available; the tests hold the others against it.
const Kernels& reference_kernels();

/// Every set this processor can run, the reference first. For tests and benchmarks.
int kernel_sets(const Kernels* sets[3]);

}  // namespace stanchion
