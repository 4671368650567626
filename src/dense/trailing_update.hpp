// The product that takes eliminated columns out of the rest of a front: C -= L (D L^T), lower triangle only.
#pragma once

#include <vector>

#include "base/buffer.hpp"
#include "base/threads.hpp"
#include "dense/block_lower.hpp"
#include "dense/kernels.hpp"

namespace stanchion {

/// Runs `work(piece)` for every piece: shared with the threads of `team`, or here in order when it is null.
/// The pieces, and so the arithmetic, are the same either way.
template <class Work>
void for_each_piece(ThreadPool* team, Offset pieces, const Work& work) {
  if (team == nullptr || pieces <= 1) {
    for (Offset piece = 0; piece < pieces; ++piece) work(piece);
  } else {
    team->share(pieces, [&](Offset piece) { work(piece); });
  }
}

/// Eliminated columns as operands of products: rows [first_row, order) of L as left and of W = L D as right
/// operand, up to `capacity` columns. first_row is a multiple of most_row_strip(), so that strips and column
/// blocks of the front end together; rows before the first that matters are zero.
template <class Scalar>
class EliminatedColumnsOf {
 public:
  /// Room for rows [first_row, order); what was there is lost. Products write whole strips of columns, so up
  /// to column_strip - 1 columns after the last one asked for are overwritten.
  void reset(Index first_row, Index order, Index capacity);

  Index first_row() const { return first_row_; }
  Index left_stride() const { return capacity_ * kernels_of<Scalar>().row_strip; }
  Index right_stride() const { return capacity_ * kernels_of<Scalar>().column_strip; }
  /// Entry of `row`, which must start a strip, in `column`.
  Scalar* left(Index row, Index column) {
    const Index strip = kernels_of<Scalar>().row_strip;
    return left_.data() + Offset{(row - first_row_) / strip} * left_stride() + Offset{column} * strip;
  }
  Scalar* right(Index row, Index column) {
    const Index strip = kernels_of<Scalar>().column_strip;
    return right_.data() + Offset{(row - first_row_) / strip} * right_stride() + Offset{column} * strip;
  }
  /// Numbers held, grown to the largest use so far.
  Offset numbers() const { return left_.size() + right_.size(); }

 private:
  Index first_row_ = 0, capacity_ = 0;
  Buffer<Scalar> left_, right_;
};
using EliminatedColumns = EliminatedColumnsOf<double>;

/// Doubles that EliminatedColumns needs for a front of `order` rows and `candidates` columns, with any
/// kernels.
constexpr Offset eliminated_doubles(Index order, Index candidates) {
  const Index columns = candidates < kFrontBlock ? candidates : kFrontBlock;
  return Offset{2} * (order + 2 * most_row_strip<double>()) * (columns + 8);
}

/// First row of the strips for rows from `row` on.
template <class Scalar>
constexpr Index strip_begin(Index row) {
  return row / most_row_strip<Scalar>() * most_row_strip<Scalar>();
}

/// Packs rows [row, order) of `count` columns of L and of W, both column-major from `row` on.
template <class Scalar>
void pack_columns(const Scalar* lower, Index leading_lower, const Scalar* scaled, Index leading_scaled,
                  Index row, Index order, Index count, EliminatedColumnsOf<Scalar>& columns);

/// For every column j in [column_begin, order) and row i >= j: C_ij -= sum_k L_ik W_jk, k < count.
/// column_begin must not be before columns.first_row(). Entries of the upper triangle inside a column block
/// may be overwritten. Cost: count multiply-adds an entry.
template <class Scalar>
void update_trailing(const BlockLowerOf<Scalar>& front, EliminatedColumnsOf<Scalar>& columns, Index count,
                     Index column_begin, ThreadPool* team);

}  // namespace stanchion
