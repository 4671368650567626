#include "dense/trailing_update.hpp"

#include <algorithm>

namespace stanchion {
namespace {

static_assert(kFrontBlock % kMostRowStrip == 0, "column blocks must end where strips do");

constexpr Index kPieceRows = 2 * kFrontBlock;

struct Piece {
  Index column_begin, column_end, row_begin, row_end;
};

}  // namespace

void EliminatedColumns::reset(Index first_row, Index order, Index capacity) {
  first_row_ = first_row;
  capacity_ = capacity + kernels().column_strip;
  const auto needed = [&](Index strip) {
    return Offset{(order - first_row + strip - 1) / strip} * strip * capacity_;
  };
  if (left_.size() < needed(kernels().row_strip)) left_ = Buffer<double>(needed(kernels().row_strip));
  if (right_.size() < needed(kernels().column_strip)) right_ = Buffer<double>(needed(kernels().column_strip));
}

void pack_columns(const double* lower, Index leading_lower, const double* scaled, Index leading_scaled,
                  Index row, Index order, Index count, EliminatedColumns& columns) {
  const Index first = strip_begin(row), skipped = row - first;
  columns.reset(first, order, count);
  std::vector<double> shifted(static_cast<std::size_t>(order - first) * static_cast<std::size_t>(count));
  const auto pack = [&](const double* source, Index leading, auto kernel, double* packed, Index stride) {
    for (Index k = 0; k < count; ++k) {
      double* target = shifted.data() + Offset{k} * (order - first);
      std::fill_n(target, skipped, 0.0);
      std::copy_n(source + Offset{k} * leading, order - row, target + skipped);
    }
    kernel(shifted.data(), order - first, order - first, count, packed, stride);
  };
  pack(lower, leading_lower, kernels().pack_left, columns.left(first, 0), columns.left_stride());
  pack(scaled, leading_scaled, kernels().pack_right, columns.right(first, 0), columns.right_stride());
}

void update_trailing(const BlockLower& front, EliminatedColumns& columns, Index count, Index column_begin,
                     ThreadPool* team) {
  const BlockLayout& layout = front.layout;
  if (count == 0 || column_begin >= layout.order) return;
  std::vector<Piece> pieces;
  for (Index block = layout.block_of(column_begin); block < layout.blocks(); ++block) {
    // A first block that starts inside a strip starts with the strip, whose rows before column_begin are
    // zero.
    const Index begin = std::max(layout.block_begin(block), columns.first_row()),
                end = layout.block_end(block);
    for (Index row = begin; row < layout.order; row += kPieceRows) {
      pieces.push_back({begin, end, row, std::min(row + kPieceRows, layout.order)});
    }
  }
  for_each_piece(team, static_cast<Offset>(pieces.size()), [&](Offset number) {
    const Piece& piece = pieces[static_cast<std::size_t>(number)];
    const Index leading = layout.leading_dimension(layout.block_of(piece.column_begin));
    // Rows in runs whose strips stay in the second-level cache while the columns pass.
    for (Index row = piece.row_begin; row < piece.row_end; row += kFrontBlock) {
      kernels().subtract_product(
          columns.left(row, 0), columns.left_stride(), columns.right(piece.column_begin, 0),
          columns.right_stride(), count, std::min(kFrontBlock, piece.row_end - row),
          piece.column_end - piece.column_begin, row - piece.column_begin,
          std::max(0, column_begin - piece.column_begin), front.column(row, piece.column_begin), leading);
    }
  });
}

}  // namespace stanchion
