// Our own loops for one instruction set: on small whole numbers they are exact, so plain loops must agree to
// the bit.
#include <algorithm>
#include <cmath>

#include "dense/selftest_parts.hpp"

namespace stanchion::selftests {
namespace {

/// A block of whole numbers with weights and signs, `rows` x `columns`.
struct Block {
  Index rows, columns;
  std::vector<double> a, weight, sign;

  Block(Numbers& numbers, Index rows_in, Index columns_in)
      : rows(rows_in),
        columns(columns_in),
        a(numbers.wholes(Offset{rows} * columns, 9)),
        weight(numbers.wholes(columns, 5)),
        sign(numbers.wholes(rows, 1)) {}
  double at(Index i, Index k) const { return a[static_cast<std::size_t>(Offset{k} * rows + i)]; }
  std::vector<double> row_zeros() const { return std::vector<double>(static_cast<std::size_t>(rows), 0.0); }
  std::vector<double> column_zeros() const {
    return std::vector<double>(static_cast<std::size_t>(columns), 0.0);
  }
};

bool sums_right(const Kernels& set, const Block& block) {
  auto rows = block.row_zeros(), growth = rows, image = rows, right_rows = rows, right_image = rows;
  auto columns = block.column_zeros(), largest = columns, right_columns = columns, right_largest = columns;
  for (Index k = 0; k < block.columns; ++k) {
    const auto kk = static_cast<std::size_t>(k);
    for (Index i = 0; i < block.rows; ++i) {
      const auto ii = static_cast<std::size_t>(i);
      const double value = block.at(i, k), size = std::fabs(value);
      right_rows[ii] += size * block.weight[kk];
      right_image[ii] += value * block.weight[kk];
      right_columns[kk] += size;
      right_largest[kk] = std::max(right_largest[kk], size);
    }
  }
  const double *a = block.a.data(), *weight = block.weight.data();
  set.weighted_abs_sums(a, block.rows, block.rows, block.columns, weight, rows.data(), columns.data());
  set.add_growth_and_image(a, block.rows, block.rows, block.columns, weight, weight, growth.data(),
                           image.data());
  set.column_abs_max(a, block.rows, block.rows, block.columns, largest.data());
  return rows == right_rows && growth == right_rows && image == right_image && columns == right_columns &&
         largest == right_largest;
}

/// Pivots that are powers of two, one pair [0 b; b 0] among them: every quotient is exact.
bool quotients_right(const Kernels& set, const Block& block) {
  std::vector<double> diagonal = block.column_zeros(), off_diagonal = diagonal, size = diagonal,
                      total = diagonal;
  std::vector<PivotKind> kind(diagonal.size(), PivotKind::kOne);
  for (std::size_t k = 0; k < diagonal.size(); ++k) diagonal[k] = k % 2 == 0 ? 0.25 : -2;
  if (diagonal.size() >= 2) {
    diagonal[0] = diagonal[1] = 0;
    off_diagonal[0] = 0.5;
    kind[0] = PivotKind::kTwoFirst;
    kind[1] = PivotKind::kTwoSecond;
  }
  std::vector<double> l(block.a.size());
  set.divide_by_pivots(block.a.data(), block.rows, l.data(), block.rows, block.rows, block.columns,
                       {diagonal.data(), off_diagonal.data(), kind.data()}, block.sign.data(), size.data(),
                       total.data());
  for (Index k = 0; k < block.columns; ++k) {
    const auto kk = static_cast<std::size_t>(k);
    const bool pair = kind[kk] != PivotKind::kOne;
    double right_size = 0, right_total = 0;
    for (Index i = 0; i < block.rows; ++i) {
      const double right = pair ? block.at(i, 1 - k) * 2 : block.at(i, k) / diagonal[kk];
      if (l[static_cast<std::size_t>(Offset{k} * block.rows + i)] != right) return false;
      right_size += std::fabs(right);
      right_total += right * block.sign[static_cast<std::size_t>(i)];
    }
    if (size[kk] != right_size || total[kk] != right_total) return false;
  }
  return true;
}

bool copies_right(const Kernels& set, const Block& block) {
  auto sums = block.row_zeros(), copy = sums, right = sums;
  double right_total = 0;
  for (Index i = 0; i < block.rows; ++i) {
    right[static_cast<std::size_t>(i)] = std::fabs(block.at(i, 0));
    right_total += std::fabs(block.at(i, 0));
  }
  const double total = set.copy_with_abs_sums(block.a.data(), block.rows, copy.data(), sums.data());
  return total == right_total && sums == right && std::equal(copy.begin(), copy.end(), block.a.begin());
}

/// The inverse of a unit lower triangle with -1, 0, 1 below the diagonal in one band: whole numbers, L X = I
/// exactly.
bool inverse_right(const Kernels& set, Numbers& numbers, Index width) {
  const auto at = [](Index i, Index j) { return static_cast<std::size_t>(i + Offset{j} * kTileWidth); };
  std::vector<double> lower(std::size_t{kTileWidth} * kTileWidth, 0.0), inverse(lower.size(), 7.0);
  for (Index j = 0; j + 1 < width; ++j) lower[at(j + 1, j)] = numbers.whole(1);
  set.invert_unit_lower(lower.data(), kTileWidth, width, inverse.data(), kTileWidth);
  for (Index j = 0; j < width; ++j) {
    for (Index i = 0; i < width; ++i) {
      const double above = i > 0 ? lower[at(i, i - 1)] * inverse[at(i - 1, j)] : 0;
      if (inverse[at(i, j)] + above != (i == j ? 1 : 0)) return false;
    }
  }
  return true;
}

}  // namespace

std::string exact_kernels(const Kernels& set) {
  Numbers numbers(4);
  const auto wrong = [&](const char* what, Index rows) {
    return std::string(what) + " of " + std::to_string(rows) + " rows are wrong with " + set.isa;
  };
  for (const Index rows : {1, 2, 3, 4, 5, 7, 8, 9, 15, 16, 17, 31, 33, 64, 100, 255, 256}) {
    const Block block(numbers, rows, 1 + rows % 11);
    if (!sums_right(set, block)) return wrong("sums", rows);
    if (!quotients_right(set, block)) return wrong("quotients", rows);
    if (!copies_right(set, block)) return wrong("copies", rows);
    if (rows <= kTileWidth && !inverse_right(set, numbers, rows)) return wrong("inverses", rows);
  }
  return {};
}

}  // namespace stanchion::selftests
