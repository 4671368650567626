// Our own loops for one instruction set: on small whole numbers they are exact, so plain loops must agree to
// the bit.
#include <algorithm>
#include <cmath>

#include "dense/selftest_parts.hpp"

namespace stanchion::selftests {
namespace {

/// A block of whole numbers with weights and signs, `rows` x `columns`.
template <class Scalar>
struct Block {
  Index rows, columns;
  std::vector<Scalar> a, weight, sign;

  Block(Numbers& numbers, Index rows_in, Index columns_in)
      : rows(rows_in),
        columns(columns_in),
        a(numbers.wholes<Scalar>(Offset{rows} * columns, 9)),
        weight(numbers.wholes<Scalar>(columns, 5)),
        sign(numbers.wholes<Scalar>(rows, 1)) {}
  Scalar at(Index i, Index k) const { return a[static_cast<std::size_t>(Offset{k} * rows + i)]; }
  std::vector<Scalar> row_zeros() const {
    return std::vector<Scalar>(static_cast<std::size_t>(rows), Scalar{0});
  }
  std::vector<Scalar> column_zeros() const {
    return std::vector<Scalar>(static_cast<std::size_t>(columns), Scalar{0});
  }
};

/// A packed operand of whole numbers may lie anywhere: room for strips of any set.
template <class Scalar>
struct Packed {
  Index stride;
  std::vector<Scalar> values;

  Packed(const KernelSet<Scalar>& set, Index strip, Index rows, Index columns) : stride(strip * columns) {
    const Index whole = std::max(strip, set.lanes);
    const Offset strips = Offset{rows + whole - 1} / whole * (whole / strip);
    values.assign(static_cast<std::size_t>(strips * stride), 7);
  }
};

template <class Scalar>
Packed<Scalar> as_left(const KernelSet<Scalar>& set, const Block<Scalar>& block) {
  Packed<Scalar> packed(set, set.row_strip, block.rows, block.columns);
  set.pack_left(block.a.data(), block.rows, block.rows, block.columns, packed.values.data(), packed.stride);
  return packed;
}

template <class Scalar>
Packed<Scalar> as_right(const KernelSet<Scalar>& set, const Block<Scalar>& block) {
  Packed<Scalar> packed(set, set.column_strip, block.rows, block.columns);
  set.pack_right(block.a.data(), block.rows, block.rows, block.columns, packed.values.data(), packed.stride);
  return packed;
}

template <class Scalar>
bool sums_right(const KernelSet<Scalar>& set, const Block<Scalar>& block) {
  auto rows = block.row_zeros(), growth = rows, image = rows, right_rows = rows, right_image = rows;
  auto columns = block.column_zeros(), largest = columns, right_columns = columns, right_largest = columns;
  for (Index k = 0; k < block.columns; ++k) {
    const auto kk = static_cast<std::size_t>(k);
    for (Index i = 0; i < block.rows; ++i) {
      const auto ii = static_cast<std::size_t>(i);
      const Scalar value = block.at(i, k), size = std::fabs(value);
      right_rows[ii] += size * block.weight[kk];
      right_image[ii] += value * block.weight[kk];
      right_columns[kk] += size;
      right_largest[kk] = std::max(right_largest[kk], size);
    }
  }
  const Scalar *a = block.a.data(), *weight = block.weight.data();
  set.weighted_abs_sums(a, block.rows, block.rows, block.columns, weight, rows.data(), columns.data());
  const Packed<Scalar> left = as_left(set, block), right = as_right(set, block);
  set.strips_growth_and_image(left.values.data(), left.stride, block.rows, block.columns, weight, weight,
                              growth.data(), image.data());
  set.strips_abs_max(right.values.data(), right.stride, block.rows, block.columns, largest.data());
  return rows == right_rows && growth == right_rows && image == right_image && columns == right_columns &&
         largest == right_largest;
}

/// Pivots that are powers of two, one pair [0 b; b 0] among them: every quotient is exact.
template <class Scalar>
bool quotients_right(const KernelSet<Scalar>& set, const Block<Scalar>& block) {
  std::vector<Scalar> size = block.column_zeros(), total = size;
  std::vector<double> diagonal(size.size(), 0.0), off_diagonal = diagonal;
  std::vector<PivotKind> kind(diagonal.size(), PivotKind::kOne);
  for (std::size_t k = 0; k < diagonal.size(); ++k) diagonal[k] = k % 2 == 0 ? 0.25 : -2;
  if (diagonal.size() >= 2) {
    diagonal[0] = diagonal[1] = 0;
    off_diagonal[0] = 0.5;
    kind[0] = PivotKind::kTwoFirst;
    kind[1] = PivotKind::kTwoSecond;
  }
  std::vector<Scalar> l(block.a.size());
  const Packed<Scalar> w = as_right(set, block);
  Packed<Scalar> left(set, set.row_strip, block.rows, block.columns);
  set.divide_strips(w.values.data(), w.stride, block.rows, block.columns,
                    {diagonal.data(), off_diagonal.data(), kind.data()}, block.sign.data(),
                    left.values.data(), left.stride, l.data(), block.rows, size.data(), total.data());
  Block<Scalar> plain = block;
  plain.a = l;
  if (left.values != as_left(set, plain).values) return false;
  for (Index k = 0; k < block.columns; ++k) {
    const auto kk = static_cast<std::size_t>(k);
    const bool pair = kind[kk] != PivotKind::kOne;
    Scalar right_size = 0, right_total = 0;
    for (Index i = 0; i < block.rows; ++i) {
      const Scalar right = pair ? block.at(i, 1 - k) * 2 : block.at(i, k) / static_cast<Scalar>(diagonal[kk]);
      if (l[static_cast<std::size_t>(Offset{k} * block.rows + i)] != right) return false;
      right_size += std::fabs(right);
      right_total += right * block.sign[static_cast<std::size_t>(i)];
    }
    if (size[kk] != right_size || total[kk] != right_total) return false;
  }
  return true;
}

/// C - L R^T and A F for whole numbers, F upper triangular.
template <class Scalar>
bool products_right(const KernelSet<Scalar>& set, Numbers& numbers, const Block<Scalar>& block) {
  const Block<Scalar> other(numbers, 1 + block.rows % 37, block.columns);
  const Packed<Scalar> left = as_left(set, block), right = as_right(set, other);
  const Index first_row = block.rows % 5,
              first_column = block.rows % 4 == 0 ? std::min(block.rows % 11, other.rows) : 0;
  std::vector<Scalar> c(static_cast<std::size_t>(block.rows) * static_cast<std::size_t>(other.rows), 100.0);
  set.subtract_product(left.values.data(), left.stride, right.values.data(), right.stride, block.columns,
                       block.rows, other.rows, first_row, first_column, c.data(), block.rows);
  const auto dot = [&](Index i, Index j, Index depth) {
    Scalar sum = 0;
    for (Index p = 0; p < depth; ++p) sum += block.at(i, p) * other.at(j, p);
    return sum;
  };
  for (Index j = 0; j < other.rows; ++j) {
    for (Index i = std::max(0, j - first_row); i < block.rows; ++i) {
      const Scalar taken = j < first_column ? 0 : dot(i, j, block.columns);
      if (c[static_cast<std::size_t>(Offset{j} * block.rows + i)] != 100 - taken) return false;
    }
  }
  const Block<Scalar> factor(numbers, block.columns, block.columns);
  std::vector<Scalar> upper(std::size_t{kTileWidth} * kTileWidth), packed_factor(upper.size());
  for (Index j = 0; j < block.columns; ++j) {
    for (Index p = 0; p <= j; ++p)
      upper[static_cast<std::size_t>(Offset{p} * kTileWidth + j)] = factor.at(j, p);
  }
  set.pack_right(upper.data(), kTileWidth, block.columns, block.columns, packed_factor.data(),
                 kTileWidth * set.column_strip);
  Packed<Scalar> w(set, set.column_strip, block.rows, kTileWidth);
  set.multiply_by_upper(block.a.data(), block.rows, block.rows, packed_factor.data(), block.columns,
                        w.values.data(), w.stride);
  for (Index j = 0; j < block.columns; ++j) {
    for (Index i = 0; i < block.rows; ++i) {
      Scalar right_sum = 0;
      for (Index p = 0; p <= j; ++p) right_sum += block.at(i, p) * factor.at(j, p);
      const Index strip = set.column_strip;
      if (w.values[static_cast<std::size_t>(Offset{i / strip} * w.stride + Offset{j} * strip + i % strip)] !=
          right_sum) {
        return false;
      }
    }
  }
  return true;
}

template <class Scalar>
bool copies_right(const KernelSet<Scalar>& set, const Block<Scalar>& block) {
  auto sums = block.row_zeros(), copy = sums, right = sums;
  Scalar right_total = 0;
  for (Index i = 0; i < block.rows; ++i) {
    right[static_cast<std::size_t>(i)] = std::fabs(block.at(i, 0));
    right_total += std::fabs(block.at(i, 0));
  }
  const Scalar total = set.copy_with_abs_sums(block.a.data(), block.rows, copy.data(), sums.data());
  return total == right_total && sums == right && std::equal(copy.begin(), copy.end(), block.a.begin());
}

/// The inverse of a unit lower triangle with -1, 0, 1 below the diagonal in one band: whole numbers, L X = I
/// exactly.
template <class Scalar>
bool inverse_right(const KernelSet<Scalar>& set, Numbers& numbers, Index width) {
  const auto at = [](Index i, Index j) { return static_cast<std::size_t>(i + Offset{j} * kTileWidth); };
  std::vector<Scalar> lower(std::size_t{kTileWidth} * kTileWidth, 0.0), inverse(lower.size(), 7.0);
  for (Index j = 0; j + 1 < width; ++j) lower[at(j + 1, j)] = static_cast<Scalar>(numbers.whole(1));
  set.invert_unit_lower(lower.data(), kTileWidth, width, inverse.data(), kTileWidth);
  for (Index j = 0; j < width; ++j) {
    for (Index i = 0; i < width; ++i) {
      const Scalar above = i > 0 ? lower[at(i, i - 1)] * inverse[at(i - 1, j)] : 0;
      if (inverse[at(i, j)] + above != (i == j ? 1 : 0)) return false;
    }
  }
  return true;
}

}  // namespace

template <class Scalar>
std::string exact_kernels(const KernelSet<Scalar>& set) {
  Numbers numbers(4);
  const auto wrong = [&](const char* what, Index rows) {
    return std::string(what) + " of " + std::to_string(rows) + " rows are wrong with " + set.isa;
  };
  for (const Index rows : {1, 2, 3, 4, 5, 7, 8, 9, 15, 16, 17, 31, 33, 64, 100, 255, 256}) {
    const Block<Scalar> block(numbers, rows, 1 + rows % 11);
    if (!sums_right(set, block)) return wrong("sums", rows);
    if (!quotients_right(set, block)) return wrong("quotients", rows);
    if (!copies_right(set, block)) return wrong("copies", rows);
    for (const Index columns : {1, 5, 16, 33, 64}) {
      if (!products_right(set, numbers, Block<Scalar>(numbers, rows, columns)))
        return wrong("products", rows);
    }
    if (rows <= kTileWidth && !inverse_right(set, numbers, rows)) return wrong("inverses", rows);
  }
  return {};
}

template std::string exact_kernels(const KernelSet<double>&);
template std::string exact_kernels(const KernelSet<float>&);

}  // namespace stanchion::selftests
