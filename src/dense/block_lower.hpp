// Storage of a dense symmetric matrix as its lower triangle cut into column blocks.
#pragma once

#include <algorithm>

#include "stanchion/types.hpp"

namespace stanchion {

/// Where the entries of a block-lower matrix lie. Columns are cut into blocks of `width`; a block holds its
/// rows from its own first column down, column by column. The small upper triangle inside a block is never
/// read.
///
/// Example, order 5, width 2 (leading dimensions are not padded in this picture):
///   block 0: rows 0-4 of columns 0, 1; block 1: rows 2-4 of columns 2, 3; block 2: row 4 of column 4.
/// The leading dimension shrinks by `width` a block, so that every offset is a closed form.
struct BlockLayout {
  Index order = 0;
  Index width = 1;   ///< multiple of 8, except when one block holds everything
  Index padded = 0;  ///< order rounded up to a multiple of 8

  BlockLayout() = default;
  BlockLayout(Index order_in, Index width_in)
      : order(order_in), width(std::max<Index>(width_in, 1)), padded((order_in + 7) / 8 * 8) {}

  Index blocks() const { return (order + width - 1) / width; }
  Index block_of(Index column) const { return column / width; }
  Index block_begin(Index block) const { return block * width; }
  Index block_end(Index block) const { return std::min(order, (block + 1) * width); }
  Index leading_dimension(Index block) const { return padded - block * width; }
  /// First entry of `block`, i.e. row block_begin(block) of its first column.
  Offset block_offset(Index block) const {
    const Offset b = block, w = width;
    return w * (b * padded - w * (b * (b - 1) / 2));
  }
  Offset offset(Index row, Index column) const {
    const Index block = column / width, begin = block * width;
    return block_offset(block) + Offset{column - begin} * leading_dimension(block) + (row - begin);
  }
  /// Entries needed.
  Offset size() const {
    if (order == 0) return 0;
    const Index last = blocks() - 1;
    return block_offset(last) + Offset{leading_dimension(last)} * (order - block_begin(last));
  }
};

constexpr Index kFrontBlock = 192;  ///< columns of a front updated together; a multiple of most_row_strip()

/// Layout of a front of `order` rows: tall blocks for the matrix products.
inline BlockLayout front_layout(Index order) {
  return {order, std::min<Index>((order + 7) / 8 * 8, kFrontBlock)};
}

/// Layout of a contribution block waiting for its parent: narrow blocks, at most an eighth wasted.
inline BlockLayout contribution_layout(Index order) {
  return {order, std::clamp<Index>((order / 8 + 15) / 16 * 16, 16, kFrontBlock)};
}

/// Numbers of a waiting contribution block: its entries, its row bounds, its row sums, its images and their
/// bounds.
inline Offset contribution_numbers(Index order) {
  return contribution_layout(order).size() + 4 * Offset{order};
}

/// A block-lower matrix: layout and storage (not owned).
template <class Scalar>
struct BlockLowerOf {
  BlockLayout layout;
  Scalar* data = nullptr;

  Scalar& at(Index row, Index column) const { return data[layout.offset(row, column)]; }
  Scalar* column(Index row, Index column_number) const { return data + layout.offset(row, column_number); }
};
using BlockLower = BlockLowerOf<double>;

}  // namespace stanchion
