#include "spectrum/block_rows.hpp"

#include <algorithm>

namespace stanchion {
namespace {

constexpr Index kV = kBlockVectors;
constexpr Index kRowsOfPiece = 2048;

}  // namespace

BlockRows::BlockRows(const ShiftedMatrix& matrix) : rows_(matrix.family->rows) {
  const MatrixFamily& family = *matrix.family;
  start_ = Buffer<Offset>(Offset{rows_} + 1, 0);
  const auto each = [&](const auto& visit) {
    for (Index j = 0; j < rows_; ++j) {
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const Index i = family.row[k];
        const double value = matrix.entry(k, i, j);
        if (value == 0) continue;
        visit(i, j, value);
        if (i != j) visit(j, i, value);
      }
    }
  };
  each([&](Index row, Index, double) { ++start_[Offset{row} + 1]; });
  for (Index i = 0; i < rows_; ++i) start_[Offset{i} + 1] += start_[i];
  column_ = Buffer<Index>(start_[rows_]);
  value_ = Buffer<double>(start_[rows_]);
  Buffer<Offset> next = start_.clone();
  each([&](Index row, Index column, double value) {
    const Offset place = next[row]++;
    column_[place] = column;
    value_[place] = value;
  });
}

void BlockRows::times(const double* in, double* out, ThreadPool& pool) const {
  pool.run((Offset{rows_} + kRowsOfPiece - 1) / kRowsOfPiece, [&](Offset piece, int) {
    const auto begin = static_cast<Index>(piece * kRowsOfPiece);
    const Index end = std::min(begin + kRowsOfPiece, rows_);
    for (Index i = begin; i < end; ++i) {
      double sum[kV] = {};
      for (Offset k = start_[i]; k < start_[Offset{i} + 1]; ++k) {
        const double* row = in + Offset{column_[k]} * kV;
        const double value = value_[k];
        for (Index v = 0; v < kV; ++v) sum[v] += value * row[v];
      }
      std::copy(sum, sum + kV, out + Offset{i} * kV);
    }
  });
}

}  // namespace stanchion
