#include "numeric/extended_product.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <vector>

#include "base/ranges.hpp"
#include "numeric/block_columns.hpp"

namespace stanchion {
namespace {

constexpr Index kV = kBlockVectors;
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
  Buffer<double> memory;
  extended_times(matrix, y, b, memory, pool);
}

void extended_times(const ShiftedMatrix& matrix, const double* y, double* b, Buffer<double>& memory,
                    ThreadPool& pool) {
  const MatrixFamily& family = *matrix.family;
  const Buffer<double>& scales = *matrix.scale;
  const Offset size = Offset{family.rows} * kV;
  // One piece of memory for the scaled vectors and two sums a range: large enough for large pages early.
  constexpr Offset kBlocks = 1 + 2 * kRanges;
  if (memory.size() < size * kBlocks) memory = Buffer<double>(size * kBlocks);
  double* const scaled = memory.data();
  std::array<double*, kRanges> high, low;
  for (std::size_t r = 0; r < kRanges; ++r) {
    high[r] = scaled + size * static_cast<Offset>(1 + 2 * r);
    low[r] = high[r] + size;
  }
  for_ranges(pool, family.rows, kBlockRowsAPiece, [&](Offset begin, Offset end) {
    for (Offset k = begin * kV; k < end * kV; ++k) scaled[k] = y[k] * scales[k / kV];
  });
  std::vector<const double*> members;
  for (const Buffer<double>& values : family.values) members.push_back(values.data());
  const DataColumns data{family.column_start.data(), family.row.data(), members.data(),
                         matrix.coefficients.data(), static_cast<Index>(members.size())};
  const std::array<Index, kRanges + 1> ends = equal_ranges(family);
  pool.run(kRanges, [&](Offset range, int) {
    const auto r = static_cast<std::size_t>(range);
    std::fill_n(high[r], 2 * size, 0.0);
    block_kernels().extended_product(data, ends[r], ends[r + 1], scaled, high[r], low[r]);
  });
  for_ranges(pool, family.rows, kBlockRowsAPiece, [&](Offset begin, Offset end) {
    for (Offset k = begin * kV; k < end * kV; ++k) {
      const double scale = scales[k / kV];
      Joined sum{high[0][k] * scale, low[0][k] * scale};
      sum.add(high[1][k] * scale);
      sum.tail += low[1][k] * scale;
      const double shift = matrix.offset * y[k];
      sum.add(-shift);
      sum.tail -= std::fma(matrix.offset, y[k], -shift);
      b[k] = sum.head + sum.tail;
    }
  });
}

AbsoluteNorm absolute_norm(const ShiftedMatrix& matrix, ThreadPool& pool) {
  const MatrixFamily& family = *matrix.family;
  if (family.rows == 0) return {};
  const Buffer<double>& scales = *matrix.scale;
  struct Row {
    double sum, scaling;  ///< of the entries' sizes; of what the scale makes of 1 in their places
    Offset terms;
  };
  std::array<Buffer<Row>, kRanges> parts;
  const std::array<Index, kRanges + 1> ends = equal_ranges(family);
  pool.run(kRanges, [&](Offset range, int) {
    const auto r = static_cast<std::size_t>(range);
    parts[r] = Buffer<Row>(family.rows, Row{0, 0, 0});
    for (Index j = ends[r]; j < ends[r + 1]; ++j) {
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        double size = 0;
        for (std::size_t t = 0; t < matrix.coefficients.size(); ++t) {
          size += std::fabs(matrix.coefficients[t] * family.values[t][k]);
        }
        const Index i = family.row[k];
        const double scaling = scales[i] * scales[j];
        for (const Index row : {i, j}) {
          parts[r][row].sum += size * scaling;
          parts[r][row].scaling += scaling;
          ++parts[r][row].terms;
          if (i == j) break;
        }
      }
    }
  });
  AbsoluteNorm most{0, 0, static_cast<Index>(matrix.coefficients.size()), 0};
  for (Index i = 0; i < family.rows; ++i) {
    double sum = std::fabs(matrix.offset), scaling = 0;
    Offset terms = 0;
    for (const Buffer<Row>& part : parts) {
      sum += part[i].sum;
      scaling += part[i].scaling;
      terms += part[i].terms;
    }
    most.norm = std::max(most.norm, sum);
    most.longest_row = std::max(most.longest_row, terms);
    most.underflow = std::max(most.underflow, scaling);
  }
  // A product among subnormal numbers and its low part are each off by up to 2^-1075, before they are scaled.
  most.underflow *= matrix.exact() ? 0 : 2.0 * most.members * 0x1p-1074;
  most.norm *= 1.001;
  return most;
}

}  // namespace stanchion
