#include "diagnose/small_eigen.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

namespace stanchion {
namespace {

constexpr int kMostSweeps = 60;

/// Rotates rows and columns p and q so that entry (p, q) vanishes.
void rotate(std::vector<double>& a, std::vector<double>& v, std::size_t n, std::size_t p, std::size_t q) {
  const double apq = a[p * n + q];
  const double theta = (a[q * n + q] - a[p * n + p]) / (2 * apq);
  const double t = (theta >= 0 ? 1.0 : -1.0) / (std::fabs(theta) + std::hypot(theta, 1.0));
  const double c = 1 / std::hypot(t, 1.0), s = t * c;
  for (std::size_t k = 0; k < n; ++k) {
    const double akp = a[k * n + p], akq = a[k * n + q];
    a[k * n + p] = c * akp - s * akq;
    a[k * n + q] = s * akp + c * akq;
  }
  for (std::size_t k = 0; k < n; ++k) {
    const double apk = a[p * n + k], aqk = a[q * n + k];
    a[p * n + k] = c * apk - s * aqk;
    a[q * n + k] = s * apk + c * aqk;
  }
  for (std::size_t k = 0; k < n; ++k) {
    const double vkp = v[k * n + p], vkq = v[k * n + q];
    v[k * n + p] = c * vkp - s * vkq;
    v[k * n + q] = s * vkp + c * vkq;
  }
}

}  // namespace

SmallEigen small_eigen(std::vector<double> matrix, Index size) {
  const auto n = static_cast<std::size_t>(size);
  std::vector<double> vectors(n * n, 0.0);
  for (std::size_t i = 0; i < n; ++i) vectors[i * n + i] = 1;
  for (int sweep = 0; sweep < kMostSweeps; ++sweep) {
    bool turned = false;
    for (std::size_t p = 0; p < n; ++p) {
      for (std::size_t q = p + 1; q < n; ++q) {
        // Small against both diagonal entries: high relative accuracy where the matrix is graded.
        const double limit =
            1e-17 * std::sqrt(std::fabs(matrix[p * n + p])) * std::sqrt(std::fabs(matrix[q * n + q]));
        if (std::fabs(matrix[p * n + q]) <= limit || matrix[p * n + q] == 0) continue;
        rotate(matrix, vectors, n, p, q);
        turned = true;
      }
    }
    if (!turned) break;
  }
  std::vector<std::size_t> order(n);
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::stable_sort(order.begin(), order.end(),
                   [&](std::size_t a, std::size_t b) { return matrix[a * n + a] < matrix[b * n + b]; });
  SmallEigen result{std::vector<double>(n), std::vector<double>(n * n)};
  for (std::size_t k = 0; k < n; ++k) {
    result.values[k] = matrix[order[k] * n + order[k]];
    for (std::size_t i = 0; i < n; ++i) result.vectors[i * n + k] = vectors[i * n + order[k]];
  }
  return result;
}

}  // namespace stanchion
