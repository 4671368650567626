#include "diagnose/subspace.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

#include "dense/blas.hpp"
#include "diagnose/small_eigen.hpp"
#include "numeric/extended_product.hpp"

namespace stanchion {
namespace {

/// What a column must keep of its length to count as independent of the ones before it.
constexpr double kIndependent = 1e-11;

/// The group's rows [from, to) of the first `columns` of x, column by column, each `leading` long.
void gather_rows(const Columns& x, RowGroup group, std::size_t from, std::size_t to, Index columns,
                 double* local, std::size_t leading) {
  for (std::size_t i = from; i < to; ++i) {
    const double* row = x.row(group[i]);
    for (Index c = 0; c < columns; ++c) local[static_cast<std::size_t>(c) * leading + i - from] = row[c];
  }
}

double dot(const double* a, const double* b, std::size_t n) {
  double s0 = 0, s1 = 0, s2 = 0, s3 = 0;
  std::size_t i = 0;
  for (; i + 4 <= n; i += 4) {
    s0 += a[i] * b[i];
    s1 += a[i + 1] * b[i + 1];
    s2 += a[i + 2] * b[i + 2];
    s3 += a[i + 3] * b[i + 3];
  }
  for (; i < n; ++i) s0 += a[i] * b[i];
  return (s0 + s1) + (s2 + s3);
}

double length(const double* a, std::size_t n) {
  return std::sqrt(dot(a, a, n));
}

/// Takes from `columns` columns of b, each n long, their parts along the `basis` orthonormal columns of q.
void subtract_along(const double* q, Index basis, double* b, Index columns, Index n) {
  if (basis == 0 || columns == 0) return;
  std::vector<double> along(static_cast<std::size_t>(basis) * static_cast<std::size_t>(columns));
  gemm_tn(basis, columns, n, 1, q, n, b, n, 0, along.data(), basis);
  gemm_nn(n, columns, basis, -1, q, n, along.data(), basis, 1, b, n);
}

}  // namespace

void multiply(const ShiftedMatrix& matrix, const Columns& x, Columns& y, ThreadPool& pool, Index from) {
  const MatrixFamily& family = *matrix.family;
  y.rows = x.rows;
  y.count = x.count;
  y.values.assign(x.values.size(), 0.0);
  // Eight at a time stay in registers.
  pool.run((x.count - from) / kBlockVectors, [&](Offset block, int) {
    const Index first = from + static_cast<Index>(block) * kBlockVectors;
    for (Index j = 0; j < family.rows; ++j) {
      const double* x_j = x.row(j) + first;
      double* y_j = y.row(j) + first;
      double sum[kBlockVectors] = {};
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const Index i = family.row[k];
        const double a = matrix.entry(k, i, j) - (i == j ? matrix.offset : 0.0);
        const double* x_i = x.row(i) + first;
        for (Index c = 0; c < kBlockVectors; ++c) sum[c] += a * x_i[c];
        if (i == j) continue;
        double* y_i = y.row(i) + first;
        for (Index c = 0; c < kBlockVectors; ++c) y_i[c] += a * x_j[c];
      }
      for (Index c = 0; c < kBlockVectors; ++c) y_j[c] += sum[c];
    }
  });
}

Columns times(const ShiftedMatrix& matrix, const Columns& x, ThreadPool& pool, Index from) {
  Columns y;
  multiply(matrix, x, y, pool, from);
  return y;
}

void multiply_extended(const ShiftedMatrix& matrix, const Columns& x, Columns& y, ThreadPool& pool) {
  y = x;
  LongVector<double> product(static_cast<std::size_t>(x.rows) * kBlockVectors), block;
  Buffer<double> memory;
  each_block(y, block, [&](double* eight) {
    extended_times(matrix, eight, product.data(), memory, pool);
    std::copy(product.begin(), product.end(), eight);
  });
}

Columns times_extended(const ShiftedMatrix& matrix, const Columns& x, ThreadPool& pool) {
  Columns y;
  multiply_extended(matrix, x, y, pool);
  return y;
}

Index orthonormalise(Columns& x, RowGroup group) {
  LongVector<double> scratch(group.size() * static_cast<std::size_t>(x.count));
  return orthonormalise(x, group, scratch.data());
}

Index orthonormalise(Columns& x, RowGroup group, double* local) {
  constexpr Index kWidth = 8;  // columns that go through the basis together
  const std::size_t n = group.size();
  const auto rows = static_cast<Index>(n);
  gather_rows(x, group, 0, n, x.count, local, n);
  const auto column = [&](Index c) { return local + static_cast<std::size_t>(c) * n; };
  Index used = 0;
  for (Index first = 0; first < x.count && used < rows; first += kWidth) {
    // The block's columns that are not zero, of unit length, next to the basis.
    Index width = 0;
    for (Index c = first; c < std::min(first + kWidth, x.count); ++c) {
      const double before = length(column(c), n);
      if (!(before > 0) || !std::isfinite(before)) continue;
      double* to = column(used + width++);
      const double* from = column(c);
      for (std::size_t i = 0; i < n; ++i) to[i] = from[i] / before;
    }
    const Index basis = used;
    for (int pass = 0; pass < 2; ++pass) subtract_along(local, basis, column(basis), width, rows);
    for (Index c = 0; c < width && used < rows; ++c) {
      double* own = column(basis + c);
      double left = length(own, n);
      for (int pass = 0; pass < 2 && left >= kIndependent; ++pass) {
        for (Index e = basis; e < used; ++e) {
          const double along = dot(column(e), own, n);
          const double* earlier = column(e);
          for (std::size_t i = 0; i < n; ++i) own[i] -= along * earlier[i];
        }
        // What little is left may lie along the basis again.
        if (pass == 0) subtract_along(local, basis, own, 1, rows);
        left = length(own, n);
      }
      if (left < kIndependent) continue;
      double* to = column(used++);
      for (std::size_t i = 0; i < n; ++i) to[i] = own[i] / left;
    }
  }
  for (std::size_t i = 0; i < n; ++i) {
    double* row = x.row(group[i]);
    for (Index c = 0; c < x.count; ++c) row[c] = c < used ? local[static_cast<std::size_t>(c) * n + i] : 0;
  }
  return used;
}

Ritz project(Columns& x, Columns& ax, RowGroup group, Index used, bool by_size, Index keep) {
  const auto m = static_cast<std::size_t>(used);
  const Index kept = keep < 0 ? used : std::min(used, keep);
  if (used == 0) return {};
  constexpr std::size_t kRows = 256;  // at a time, so that they stay in the cache
  std::vector<double> xc(kRows * m), ac(kRows * m), h(m * m, 0.0);
  const auto each_chunk = [&](const auto& use) {
    for (std::size_t from = 0; from < group.size(); from += kRows) {
      const std::size_t to = std::min(from + kRows, group.size());
      gather_rows(x, group, from, to, used, xc.data(), kRows);
      gather_rows(ax, group, from, to, used, ac.data(), kRows);
      use(from, static_cast<Index>(to - from));
    }
  };
  each_chunk([&](std::size_t, Index rows) {
    gemm_tn(used, used, rows, 1, xc.data(), kRows, ac.data(), kRows, 1, h.data(), used);
  });
  for (std::size_t p = 0; p < m; ++p) {
    for (std::size_t q = p + 1; q < m; ++q) h[p * m + q] = h[q * m + p] = (h[p * m + q] + h[q * m + p]) / 2;
  }
  const SmallEigen eigen = small_eigen(h, used);
  std::vector<std::size_t> order(m);
  std::iota(order.begin(), order.end(), std::size_t{0});
  if (by_size) {
    std::stable_sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
      return std::fabs(eigen.values[a]) < std::fabs(eigen.values[b]);
    });
  }
  const auto k_kept = static_cast<std::size_t>(kept);
  Ritz ritz{std::vector<double>(k_kept), std::vector<double>(k_kept, 0.0)};
  std::vector<double> turn(m * k_kept), xt(kRows * k_kept), at(kRows * k_kept);
  for (std::size_t k = 0; k < k_kept; ++k) {
    ritz.value[k] = eigen.values[order[k]];
    for (std::size_t p = 0; p < m; ++p) turn[k * m + p] = eigen.vectors[p * m + order[k]];
  }
  each_chunk([&](std::size_t from, Index rows) {
    gemm_nn(rows, kept, used, 1, xc.data(), kRows, turn.data(), used, 0, xt.data(), kRows);
    gemm_nn(rows, kept, used, 1, ac.data(), kRows, turn.data(), used, 0, at.data(), kRows);
    for (std::size_t i = 0; i < static_cast<std::size_t>(rows); ++i) {
      double* row = x.row(group[from + i]);
      double* product = ax.row(group[from + i]);
      for (std::size_t k = 0; k < k_kept; ++k) {
        row[k] = xt[k * kRows + i];
        product[k] = at[k * kRows + i];
        const double r = product[k] - ritz.value[k] * row[k];
        ritz.residual[k] += r * r;
      }
      std::fill(row + k_kept, row + m, 0.0);
      std::fill(product + k_kept, product + m, 0.0);
    }
  });
  for (double& r : ritz.residual) r = std::sqrt(r);
  return ritz;
}

}  // namespace stanchion
