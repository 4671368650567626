#include "dense/trailing_update.hpp"

#include <algorithm>

#include "dense/blas.hpp"

namespace stanchion {
namespace {

constexpr Index kDiagonalStrip = 64;  ///< columns of one product that crosses the diagonal

struct Piece {
  Index column_begin, column_end, row_begin, row_end;
};

void multiply(const BlockLower& front, const EliminatedColumns& columns, const Piece& piece) {
  const Index rows = piece.row_end - piece.row_begin, width = piece.column_end - piece.column_begin;
  if (rows <= 0 || width <= 0) return;
  const Index block = front.layout.block_of(piece.column_begin);
  gemm_nt(rows, width, columns.count, -1.0, columns.lower + (piece.row_begin - columns.first_row),
          columns.leading_lower, columns.scaled + (piece.column_begin - columns.first_row), columns.leading_scaled,
          1.0, front.column(piece.row_begin, piece.column_begin), front.layout.leading_dimension(block));
}

/// A piece whose rows start on its diagonal goes strip by strip, so that little of the upper triangle is computed.
void multiply_diagonal(const BlockLower& front, const EliminatedColumns& columns, const Piece& piece) {
  for (Index begin = piece.column_begin; begin < piece.column_end; begin += kDiagonalStrip) {
    const Index end = std::min(begin + kDiagonalStrip, piece.column_end);
    multiply(front, columns, {begin, end, begin, piece.row_end});
  }
}

}  // namespace

void update_trailing(const BlockLower& front, const EliminatedColumns& columns, Index column_begin, Index column_end,
                     ThreadPool* team) {
  const BlockLayout& layout = front.layout;
  if (columns.count == 0 || column_begin >= column_end) return;
  std::vector<Piece> pieces;
  for (Index block = layout.block_of(column_begin); block <= layout.block_of(column_end - 1); ++block) {
    const Index begin = std::max(column_begin, layout.block_begin(block));
    const Index end = std::min(column_end, layout.block_end(block));
    for (Index row = begin; row < layout.order; row += kRowChunk) {
      pieces.push_back({begin, end, row, std::min(row + kRowChunk, layout.order)});
    }
  }
  for_each_piece(team, static_cast<Offset>(pieces.size()), [&](Offset number) {
    const Piece& piece = pieces[static_cast<std::size_t>(number)];
    if (piece.row_begin == piece.column_begin) {
      multiply_diagonal(front, columns, piece);
    } else {
      multiply(front, columns, piece);
    }
  });
}

}  // namespace stanchion
