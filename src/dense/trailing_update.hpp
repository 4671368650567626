// The product that takes eliminated columns out of the rest of a front: C -= L (D L^T), lower triangle only.
#pragma once

#include "base/threads.hpp"
#include "dense/block_lower.hpp"

namespace stanchion {

/// Runs `work(piece)` for every piece: on all threads of `team`, or here in order when it is null. The pieces, and
/// so the arithmetic, are the same either way.
template <class Work>
void for_each_piece(ThreadPool* team, Offset pieces, const Work& work) {
  if (team == nullptr || pieces <= 1) {
    for (Offset piece = 0; piece < pieces; ++piece) work(piece);
  } else {
    team->run(pieces, [&](Offset piece, int) { work(piece); });
  }
}

constexpr Index kRowChunk = 512;  ///< rows of one piece of a product

/// Eliminated columns seen as two tall matrices over rows [first_row, order): L in place, W = L D in scratch.
struct EliminatedColumns {
  const double* lower;  ///< entry (first_row, 0)
  Index leading_lower;
  const double* scaled;  ///< entry (first_row, 0)
  Index leading_scaled;
  Index first_row;
  Index count;
};

/// For every column j in [column_begin, column_end) and row i in [max(j, row_begin), order):
/// C_ij -= sum_k L_ik W_jk. All rows must be >= columns.first_row.
/// Cost: count multiply-adds an entry; blocks on the diagonal also compute part of the unused triangle.
void update_trailing(const BlockLower& front, const EliminatedColumns& columns, Index column_begin, Index column_end,
                     ThreadPool* team);

}  // namespace stanchion
