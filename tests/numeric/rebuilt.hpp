// P A P^T - L D L^T multiplied out in extended precision from a kept factor.
#pragma once

#include <cmath>
#include <vector>

#include "numeric/factorization.hpp"
#include "support/factored.hpp"

namespace stanchion::test {

/// Largest row sum of |P A P^T - L D L^T|, A as formed (scaled, offset included, exact for one member).
/// Dense: for small matrices. Also checks that the factor eliminates every equation once.
inline double largest_row_error(const ShiftedMatrix& matrix, const Factor& factor) {
  const auto n = static_cast<std::size_t>(factor.rows);
  std::vector<long double> left(n * n, 0.0L);
  for (Index j = 0; j < factor.rows; ++j) {
    const auto jj = static_cast<std::size_t>(j);
    for (Offset k = matrix.family->column_start[j]; k < matrix.family->column_start[Offset{j} + 1]; ++k) {
      const auto i = static_cast<std::size_t>(matrix.family->row[k]);
      const long double value = matrix.entry(k, matrix.family->row[k], j) - (i == jj ? matrix.offset : 0.0L);
      left[i * n + jj] = left[jj * n + i] = value;
    }
  }
  std::vector<int> eliminated(n, 0);
  for (const FactorFront& front : factor.fronts) {
    const auto lower = [&](Index i, Index k) -> long double {
      long double entry = 0;
      front.with_lower([&](const auto* entries) { entry = entries[Offset{k} * front.order + i]; });
      return entry;
    };
    for (Index k = 0; k < front.pivots; ++k) {
      ++eliminated[static_cast<std::size_t>(front.position[k])];
      for (Index i = 0; i < front.order; ++i) {
        long double w = lower(i, k) * static_cast<long double>(front.diagonal[k]);
        if (front.kind[k] == PivotKind::kTwoFirst) w += lower(i, k + 1) * front.off_diagonal[k];
        if (front.kind[k] == PivotKind::kTwoSecond) w += lower(i, k - 1) * front.off_diagonal[k - 1];
        if (w == 0) continue;
        const auto row = static_cast<std::size_t>(front.position[i]) * n;
        for (Index j = 0; j < front.order; ++j)
          left[row + static_cast<std::size_t>(front.position[j])] -= w * lower(j, k);
      }
    }
  }
  for (const int times : eliminated) EXPECT_EQ(times, 1);
  long double largest = 0;
  for (std::size_t i = 0; i < n; ++i) {
    long double sum = 0;
    for (std::size_t j = 0; j < n; ++j) sum += std::fabs(left[i * n + j]);
    largest = std::max(largest, sum);
  }
  return static_cast<double>(largest);
}

}  // namespace stanchion::test
