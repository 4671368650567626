// Eliminates the pivots of one front: L D L^T with 1x1 and 2x2 pivots, accepted after the fact.
#pragma once

#include <vector>

#include "dense/block_lower.hpp"
#include "dense/kernels.hpp"
#include "dense/trailing_update.hpp"

namespace stanchion {

struct EliminationOptions {
  bool definite = false;     ///< no pivoting; stop at the first pivot that is not positive
  double threshold = 0.01;   ///< multipliers stay below 1 / threshold (not when definite)
  bool keep_factor = false;  ///< the rows of L already computed follow later interchanges
};

/// The vector that detects faults: every pivot column l_k with its D adds its share of L D L^T x to the image
/// of x. A machine that computes right leaves image = A x within the bounds (src/inertia/error_bound.md,
/// section 9).
template <class Scalar>
struct FaultVectorOf {
  Scalar* sign = nullptr;   ///< x, one entry +1 or -1 a row; null: no detection
  Scalar* image = nullptr;  ///< one per row; shares of L D L^T x are added
  Scalar* error = nullptr;  ///< one per row: bound on the rounding of `image`; the caller adds to it
};

/// A front: rows [0, candidates) may be eliminated, the rest only updated. Nothing is owned.
template <class Scalar>
struct FrontOf {
  BlockLowerOf<Scalar>
      matrix;  ///< in: assembled lower triangle; out: L below eliminated pivots, Schur complement after
  Index candidates = 0;
  PivotArrays pivots{};           ///< room for `candidates`
  Index* label = nullptr;         ///< one per row, permuted along (callers put equation positions here)
  Scalar* row_error = nullptr;    ///< one per row, permuted along; bounds are added here. Never null.
  Scalar* growth = nullptr;       ///< one per row, zero on entry: gets row sums of |L||D||L^T|. Never null.
  FaultVectorOf<Scalar> fault{};  ///< permuted along
};
using Front = FrontOf<double>;

struct EliminationResult {
  Index eliminated = 0;     ///< leading rows that became pivots; the others wait for the parent
  bool stopped = false;     ///< definite only: a pivot was not positive
  bool not_finite = false;  ///< overflow: the front holds Inf or NaN, nothing may be concluded
  Offset two_by_two = 0;
  Index longest_sum = 0;      ///< most products added up in one call
  Index additions = 0;        ///< most such sums added to one entry
  Index sign_sum_depth = 0;   ///< longest path of additions to an entry of L^T x
  Index image_additions = 0;  ///< most additions to an entry of the image
};

/// Scratch of one worker, grown on demand and reused from front to front.
template <class Scalar>
struct EliminationScratchOf {
  EliminatedColumnsOf<Scalar> beyond;  ///< rows beyond the current column block
  EliminatedColumnsOf<Scalar> inside;  ///< rows of the current column block below the current tile
  Buffer<Scalar> scaled;               ///< W = L D of pivots found by search
  std::vector<Scalar> tile, inverse, factor, column_parts, sums, repacked;
  std::vector<Scalar> no_fault_vector;  ///< zeros for a front without one
  std::vector<Index> permutation;

  Offset numbers() const { return beyond.numbers() + inside.numbers() + scaled.size(); }
};
using EliminationScratch = EliminationScratchOf<double>;

/// Pivots are taken tile by tile inside a column block: first in the order given, then with complete pivoting
/// inside the tile; columns whose multipliers exceed the limit are put back and retried later, at last one by
/// one with a full search (Duff, Hogg, Lopez, SIAM J. Sci. Comput. 42 (2020) C23). Nothing is perturbed. When
/// no row lies below the candidates, all of them are eliminated. Zero pivots are exact zero columns. `team`
/// null: this thread alone; the result has the same bits either way. Cost: order^2 x candidates flops.
template <class Scalar>
EliminationResult eliminate_front(const FrontOf<Scalar>& front, const EliminationOptions& options,
                                  EliminationScratchOf<Scalar>& scratch, ThreadPool* team);

/// Interchanges rows and columns i < j of the front, with their labels and bounds. Columns before
/// `first_kept_column` are not touched.
template <class Scalar>
void swap_symmetric(const FrontOf<Scalar>& front, Index i, Index j, Index first_kept_column);

struct PairedCandidates {
  Index end = 0;  ///< of those that may be pivots; the others have no partner left among the candidates
  bool zero_columns = false;  ///< some of the others vanish
};

/// Puts candidates from `from` on that may be pivots by their own column in front: with a diagonal entry that
/// is large enough, or each beside the candidate with its largest entry. Cost: one look at the columns, and
/// the interchanges.
template <class Scalar>
PairedCandidates pair_up(const FrontOf<Scalar>& front, Index from, double threshold, Index first_kept_column);

/// The last resort for candidates [from, candidates): threshold partial pivoting with a search of whole
/// columns. Returns the first row that was not eliminated. Cost: (candidates - from)^2 x order.
template <class Scalar>
Index eliminate_by_search(const FrontOf<Scalar>& front, Index from, const EliminationOptions& options,
                          EliminationScratchOf<Scalar>& scratch, ThreadPool* team, EliminationResult& result);

}  // namespace stanchion
