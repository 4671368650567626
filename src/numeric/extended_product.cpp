#include "numeric/extended_product.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <vector>

namespace stanchion {
namespace {

constexpr auto kV = static_cast<std::size_t>(kBlockVectors);
constexpr Index kRanges = 2;  ///< column ranges, each with sums of its own

/// Column ranges with about the same number of entries; the same whatever the number of threads.
std::array<Index, kRanges + 1> equal_ranges(const MatrixFamily& family) {
  std::array<Index, kRanges + 1> ends{};
  for (Index r = 1; r < kRanges; ++r) {
    const Offset target = family.entries() / kRanges * r;
    const Offset* at = std::lower_bound(family.column_start.begin(), family.column_start.end(), target);
    ends[static_cast<std::size_t>(r)] =
        std::min(static_cast<Index>(at - family.column_start.begin()), family.rows);
  }
  ends[kRanges] = family.rows;
  return ends;
}

/// (first + second) scale - offset y, rounded once from sums kept as pairs.
struct Joined {
  double head, tail;
  void add(double x) {
    const double sum = head + x, t = sum - head;
    tail += (head - (sum - t)) + (x - t);
    head = sum;
  }
};

}  // namespace

void extended_times(const ShiftedMatrix& matrix, const double* y, double* b, ThreadPool& pool) {
  const MatrixFamily& family = *matrix.family;
  const auto size = static_cast<std::size_t>(family.rows) * kV;
  std::vector<double> scaled(size);
  for (std::size_t k = 0; k < size; ++k) scaled[k] = y[k] * (*matrix.scale)[static_cast<Offset>(k / kV)];
  std::vector<const double*> members;
  for (const Buffer<double>& values : family.values) members.push_back(values.data());
  const DataColumns data{family.column_start.data(), family.row.data(), members.data(),
                         matrix.coefficients.data(), static_cast<Index>(members.size())};
  std::array<std::vector<double>, kRanges> high, low;
  const std::array<Index, kRanges + 1> ends = equal_ranges(family);
  pool.run(kRanges, [&](Offset range, int) {
    const auto r = static_cast<std::size_t>(range);
    high[r].assign(size, 0.0);
    low[r].assign(size, 0.0);
    block_kernels().extended_product(data, ends[r], ends[r + 1], scaled.data(), high[r].data(),
                                     low[r].data());
  });
  for (std::size_t k = 0; k < size; ++k) {
    const double scale = (*matrix.scale)[static_cast<Offset>(k / kV)];
    Joined sum{high[0][k] * scale, low[0][k] * scale};
    sum.add(high[1][k] * scale);
    sum.tail += low[1][k] * scale;
    const double shift = matrix.offset * y[k];
    sum.add(-shift);
    sum.tail -= std::fma(matrix.offset, y[k], -shift);
    b[k] = sum.head + sum.tail;
  }
}

AbsoluteNorm absolute_norm(const ShiftedMatrix& matrix) {
  const MatrixFamily& family = *matrix.family;
  const auto rows = static_cast<std::size_t>(family.rows);
  std::vector<double> sums(rows, std::fabs(matrix.offset));
  std::vector<Offset> terms(rows, 0);
  for (Index j = 0; j < family.rows; ++j) {
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      double size = 0;
      for (std::size_t t = 0; t < matrix.coefficients.size(); ++t) {
        size += std::fabs(matrix.coefficients[t] * family.values[t][k]);
      }
      const Index i = family.row[k];
      size *= (*matrix.scale)[i] * (*matrix.scale)[j];
      sums[static_cast<std::size_t>(i)] += size;
      ++terms[static_cast<std::size_t>(i)];
      if (i == j) continue;
      sums[static_cast<std::size_t>(j)] += size;
      ++terms[static_cast<std::size_t>(j)];
    }
  }
  if (rows == 0) return {};
  return {*std::max_element(sums.begin(), sums.end()) * 1.001, *std::max_element(terms.begin(), terms.end()),
          static_cast<Index>(matrix.coefficients.size())};
}

}  // namespace stanchion
