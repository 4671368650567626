#include "dense/trailing_update.hpp"

#include <algorithm>

namespace stanchion {
namespace {

static_assert(kFrontBlock % most_row_strip<double>() == 0 && kFrontBlock % most_row_strip<float>() == 0,
              "column blocks must end where strips do");

constexpr Index kPieceRows = 2 * kFrontBlock;

struct Piece {
  Index column_begin, column_end, row_begin, row_end;
};

}  // namespace

template <class Scalar>
void EliminatedColumnsOf<Scalar>::reset(Index first_row, Index order, Index capacity) {
  first_row_ = first_row;
  const KernelSet<Scalar>& set = kernels_of<Scalar>();
  capacity_ = capacity + set.column_strip;
  // A right operand holds whole registers of rows, which are whole strips.
  const auto needed = [&](Index whole) {
    return Offset{(order - first_row + whole - 1) / whole} * whole * capacity_;
  };
  if (left_.size() < needed(set.row_strip)) left_ = Buffer<Scalar>(needed(set.row_strip));
  if (right_.size() < needed(set.lanes)) right_ = Buffer<Scalar>(needed(set.lanes));
}

template <class Scalar>
void pack_columns(const Scalar* lower, Index leading_lower, const Scalar* scaled, Index leading_scaled,
                  Index row, Index order, Index count, EliminatedColumnsOf<Scalar>& columns) {
  const Index first = strip_begin<Scalar>(row), skipped = row - first;
  columns.reset(first, order, count);
  std::vector<Scalar> shifted(static_cast<std::size_t>(order - first) * static_cast<std::size_t>(count));
  const auto pack = [&](const Scalar* source, Index leading, auto kernel, Scalar* packed, Index stride) {
    for (Index k = 0; k < count; ++k) {
      Scalar* target = shifted.data() + Offset{k} * (order - first);
      std::fill_n(target, skipped, Scalar{0});
      std::copy_n(source + Offset{k} * leading, order - row, target + skipped);
    }
    kernel(shifted.data(), order - first, order - first, count, packed, stride);
  };
  pack(lower, leading_lower, kernels_of<Scalar>().pack_left, columns.left(first, 0), columns.left_stride());
  pack(scaled, leading_scaled, kernels_of<Scalar>().pack_right, columns.right(first, 0),
       columns.right_stride());
}

template <class Scalar>
void update_trailing(const BlockLowerOf<Scalar>& front, EliminatedColumnsOf<Scalar>& columns, Index count,
                     Index column_begin, ThreadPool* team) {
  const BlockLayout& layout = front.layout;
  if (count == 0 || column_begin >= layout.order) return;
  const auto update = [&](const Piece& piece) {
    const Index leading = layout.leading_dimension(layout.block_of(piece.column_begin));
    // Rows in runs whose strips stay in the second-level cache while the columns pass.
    for (Index row = piece.row_begin; row < piece.row_end; row += kFrontBlock) {
      kernels_of<Scalar>().subtract_product(
          columns.left(row, 0), columns.left_stride(), columns.right(piece.column_begin, 0),
          columns.right_stride(), count, std::min(kFrontBlock, piece.row_end - row),
          piece.column_end - piece.column_begin, row - piece.column_begin,
          std::max(0, column_begin - piece.column_begin), front.column(row, piece.column_begin), leading);
    }
  };
  std::vector<Piece> pieces;  // for a team; alone one after the other
  for (Index block = layout.block_of(column_begin); block < layout.blocks(); ++block) {
    // A first block that starts inside a strip starts with the strip, whose rows before column_begin are
    // zero.
    const Index begin = std::max(layout.block_begin(block), columns.first_row()),
                end = layout.block_end(block);
    for (Index row = begin; row < layout.order; row += kPieceRows) {
      const Piece piece{begin, end, row, std::min(row + kPieceRows, layout.order)};
      if (team == nullptr) {
        update(piece);
      } else {
        pieces.push_back(piece);
      }
    }
  }
  for_each_piece(team, static_cast<Offset>(pieces.size()),
                 [&](Offset number) { update(pieces[static_cast<std::size_t>(number)]); });
}

template class EliminatedColumnsOf<double>;
template class EliminatedColumnsOf<float>;
template void pack_columns(const double*, Index, const double*, Index, Index, Index, Index,
                           EliminatedColumnsOf<double>&);
template void pack_columns(const float*, Index, const float*, Index, Index, Index, Index,
                           EliminatedColumnsOf<float>&);
template void update_trailing(const BlockLowerOf<double>&, EliminatedColumnsOf<double>&, Index, Index,
                              ThreadPool*);
template void update_trailing(const BlockLowerOf<float>&, EliminatedColumnsOf<float>&, Index, Index,
                              ThreadPool*);

}  // namespace stanchion
