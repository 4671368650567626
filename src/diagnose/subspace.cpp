#include "diagnose/subspace.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

#include "diagnose/small_eigen.hpp"
#include "numeric/extended_product.hpp"

namespace stanchion {
namespace {

/// What a column must keep of its length to count as independent of the ones before it.
constexpr double kIndependent = 1e-11;

/// The group's rows of x, column by column.
std::vector<double> gathered(const Columns& x, RowGroup group) {
  const std::size_t n = group.size();
  std::vector<double> local(n * static_cast<std::size_t>(x.count));
  for (std::size_t i = 0; i < n; ++i) {
    const double* row = x.row(group[i]);
    for (Index c = 0; c < x.count; ++c) local[static_cast<std::size_t>(c) * n + i] = row[c];
  }
  return local;
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

}  // namespace

Columns times(const ShiftedMatrix& matrix, const Columns& x) {
  const MatrixFamily& family = *matrix.family;
  Columns y(x.rows, x.count);
  const Index count = x.count;
  for (Index j = 0; j < family.rows; ++j) {
    const double* x_j = x.row(j);
    double* y_j = y.row(j);
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      const double a = matrix.entry(k, i, j) - (i == j ? matrix.offset : 0.0);
      const double* x_i = x.row(i);
      for (Index c = 0; c < count; ++c) y_j[c] += a * x_i[c];
      if (i == j) continue;
      double* y_i = y.row(i);
      for (Index c = 0; c < count; ++c) y_i[c] += a * x_j[c];
    }
  }
  return y;
}

Columns times_extended(const ShiftedMatrix& matrix, const Columns& x, ThreadPool& pool) {
  Columns y = x;
  std::vector<double> product(static_cast<std::size_t>(x.rows) * kBlockVectors);
  each_block(y, [&](double* block) {
    extended_times(matrix, block, product.data(), pool);
    std::copy(product.begin(), product.end(), block);
  });
  return y;
}

Index orthonormalise(Columns& x, RowGroup group) {
  const std::size_t n = group.size();
  std::vector<double> local = gathered(x, group);
  Index used = 0;
  for (Index c = 0; c < x.count && static_cast<std::size_t>(used) < n; ++c) {
    double* column = local.data() + static_cast<std::size_t>(c) * n;
    const double before = std::sqrt(dot(column, column, n));
    if (!(before > 0) || !std::isfinite(before)) continue;
    for (std::size_t i = 0; i < n; ++i) column[i] /= before;
    double length = 1;
    for (int pass = 0; pass < 2; ++pass) {
      for (Index e = 0; e < used; ++e) {
        const double* earlier = local.data() + static_cast<std::size_t>(e) * n;
        const double along = dot(earlier, column, n);
        for (std::size_t i = 0; i < n; ++i) column[i] -= along * earlier[i];
      }
      length = std::sqrt(dot(column, column, n));
      if (length < kIndependent) break;
    }
    if (length < kIndependent) continue;
    double* to = local.data() + static_cast<std::size_t>(used++) * n;
    for (std::size_t i = 0; i < n; ++i) to[i] = column[i] / length;
  }
  for (std::size_t i = 0; i < n; ++i) {
    double* row = x.row(group[i]);
    for (Index c = 0; c < x.count; ++c) row[c] = c < used ? local[static_cast<std::size_t>(c) * n + i] : 0;
  }
  return used;
}

Ritz project(Columns& x, Columns& ax, RowGroup group, Index used, bool by_size) {
  const auto m = static_cast<std::size_t>(used);
  std::vector<double> h(m * m, 0.0);
  for (const Index i : group) {
    const double* row = x.row(i);
    const double* product = ax.row(i);
    for (std::size_t p = 0; p < m; ++p) {
      for (std::size_t q = 0; q < m; ++q) h[p * m + q] += row[p] * product[q];
    }
  }
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
  Ritz ritz{std::vector<double>(m), std::vector<double>(m, 0.0)};
  for (std::size_t k = 0; k < m; ++k) ritz.value[k] = eigen.values[order[k]];
  std::vector<double> turned(m), turned_product(m);
  for (const Index i : group) {
    double* row = x.row(i);
    double* product = ax.row(i);
    for (std::size_t k = 0; k < m; ++k) {
      double sum = 0, product_sum = 0;
      for (std::size_t p = 0; p < m; ++p) {
        const double v = eigen.vectors[p * m + order[k]];
        sum += row[p] * v;
        product_sum += product[p] * v;
      }
      turned[k] = sum;
      turned_product[k] = product_sum;
      const double r = product_sum - ritz.value[k] * sum;
      ritz.residual[k] += r * r;
    }
    std::copy(turned.begin(), turned.end(), row);
    std::copy(turned_product.begin(), turned_product.end(), product);
  }
  for (double& r : ritz.residual) r = std::sqrt(r);
  return ritz;
}

}  // namespace stanchion
