#include "diagnose/constraint_space.hpp"

#include <algorithm>
#include <cmath>

namespace stanchion {
namespace {

constexpr int kMostSteps = 500;
constexpr double kSettled = 1e-15;  ///< of the first residual

}  // namespace

ConstraintSpace::ConstraintSpace(const Structure& s, const ShiftedMatrix& matrix) : rows_(s.rows) {
  std::vector<Index> number(static_cast<std::size_t>(s.rows), -1);
  for (Index row = 0; row < s.rows; ++row) {
    if (s.kind[static_cast<std::size_t>(row)] != DofKind::kMultiplier) continue;
    number[static_cast<std::size_t>(row)] = static_cast<Index>(multipliers_.size());
    multipliers_.push_back(row);
  }
  const MatrixFamily& family = *matrix.family;
  for (Index j = 0; j < family.rows; ++j) {
    const Index mj = number[static_cast<std::size_t>(j)];
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k], mi = number[static_cast<std::size_t>(i)];
      const double a = matrix.entry(k, i, j);
      if (a == 0 || (mi < 0) == (mj < 0)) continue;
      entries_.push_back({mi >= 0 ? mi : mj, mi >= 0 ? j : i, a});
    }
  }
  std::sort(entries_.begin(), entries_.end(), [](const Entry& a, const Entry& b) {
    return a.multiplier != b.multiplier ? a.multiplier < b.multiplier : a.row < b.row;
  });
  std::vector<double> size(multipliers_.size(), 0.0);
  for (const Entry& e : entries_) size[static_cast<std::size_t>(e.multiplier)] += e.value * e.value;
  for (Entry& e : entries_) e.value /= std::sqrt(size[static_cast<std::size_t>(e.multiplier)]);
}

std::vector<double> ConstraintSpace::times_b(const Columns& x) const {
  const auto n = static_cast<std::size_t>(x.count);
  std::vector<double> y(multipliers_.size() * n, 0.0);
  for (const Entry& e : entries_) {
    double* to = y.data() + static_cast<std::size_t>(e.multiplier) * n;
    const double* from = x.row(e.row);
    for (std::size_t c = 0; c < n; ++c) to[c] += e.value * from[c];
  }
  return y;
}

void ConstraintSpace::subtract_transposed(const std::vector<double>& mu, Columns& x) const {
  const auto n = static_cast<std::size_t>(x.count);
  for (const Entry& e : entries_) {
    double* to = x.row(e.row);
    const double* from = mu.data() + static_cast<std::size_t>(e.multiplier) * n;
    for (std::size_t c = 0; c < n; ++c) to[c] -= e.value * from[c];
  }
}

std::vector<double> ConstraintSpace::times_gram(const std::vector<double>& mu, Index count) const {
  Columns x(rows_, count);
  subtract_transposed(mu, x);
  std::vector<double> y = times_b(x);
  for (double& v : y) v = -v;
  return y;
}

void ConstraintSpace::project(Columns& x) const {
  const auto n = static_cast<std::size_t>(x.count);
  for (const Index row : multipliers_) std::fill_n(x.row(row), x.count, 0.0);
  const auto along = [n](const std::vector<double>& a, const std::vector<double>& b) {
    std::vector<double> sum(n, 0.0);
    for (std::size_t k = 0; k < a.size(); ++k) sum[k % n] += a[k] * b[k];
    return sum;
  };
  for (int pass = 0; pass < 2; ++pass) {
    std::vector<double> residual = times_b(x), direction = residual, mu(residual.size(), 0.0);
    std::vector<double> size = along(residual, residual);
    const std::vector<double> first = size;
    for (int step = 0; step < kMostSteps; ++step) {
      bool open = false;
      for (std::size_t c = 0; c < n; ++c) open = open || size[c] > kSettled * kSettled * first[c];
      if (!open) break;
      const std::vector<double> image = times_gram(direction, x.count);
      const std::vector<double> curvature = along(direction, image);
      for (std::size_t k = 0; k < mu.size(); ++k) {
        const std::size_t c = k % n;
        const double length = curvature[c] > 0 ? size[c] / curvature[c] : 0;
        mu[k] += length * direction[k];
        residual[k] -= length * image[k];
      }
      const std::vector<double> next = along(residual, residual);
      for (std::size_t k = 0; k < mu.size(); ++k) {
        const std::size_t c = k % n;
        direction[k] = residual[k] + (size[c] > 0 ? next[c] / size[c] : 0) * direction[k];
      }
      size = next;
    }
    subtract_transposed(mu, x);
  }
}

}  // namespace stanchion
