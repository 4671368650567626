// Exact inertia of small dyadic matrices, by rational elimination: the oracle that no rounding touches.
#pragma once

#include <boost/multiprecision/cpp_int.hpp>
#include <vector>

#include "sparse/symmetric_matrix.hpp"

namespace stanchion::test {

struct ExactInertia {
  int negative = 0, zero = 0, positive = 0;
};

/// Symmetric elimination with 1x1 pivots, and a 2x2 pivot [0 b; b 0]-like step when every diagonal is zero;
/// all in rational numbers, so every sign is exact. Doubles are dyadic, hence exactly representable. For n up
/// to about 30.
inline ExactInertia exact_inertia(const SymmetricMatrix& matrix) {
  using Rational = boost::multiprecision::cpp_rational;
  const auto n = static_cast<std::size_t>(matrix.rows);
  std::vector<std::vector<Rational>> a(n, std::vector<Rational>(n));
  for (Index j = 0; j < matrix.rows; ++j) {
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      const auto i = static_cast<std::size_t>(matrix.row[k]), jj = static_cast<std::size_t>(j);
      a[i][jj] = a[jj][i] = Rational(matrix.value[k]);
    }
  }
  ExactInertia count;
  std::vector<std::size_t> left(n);
  for (std::size_t i = 0; i < n; ++i) left[i] = i;
  const auto eliminate = [&](std::size_t place) {
    const std::size_t p = left[place];
    left.erase(left.begin() + static_cast<std::ptrdiff_t>(place));
    const Rational pivot = a[p][p];
    for (const std::size_t i : left) {
      if (a[i][p] == 0) continue;
      const Rational factor = a[i][p] / pivot;
      for (const std::size_t j : left) a[i][j] -= factor * a[p][j];
    }
    ++(pivot < 0 ? count.negative : count.positive);
  };
  while (!left.empty()) {
    std::size_t place = 0;
    while (place < left.size() && a[left[place]][left[place]] == 0) ++place;
    if (place < left.size()) {
      eliminate(place);
      continue;
    }
    // All diagonals vanish: adding one coupled row to another is a congruence that makes one that does not.
    bool coupled = false;
    for (std::size_t i = 0; i < left.size() && !coupled; ++i) {
      for (std::size_t j = i + 1; j < left.size() && !coupled; ++j) {
        if (a[left[i]][left[j]] == 0) continue;
        for (const std::size_t k : left) a[left[i]][k] += a[left[j]][k];
        for (const std::size_t k : left) a[k][left[i]] += a[k][left[j]];
        coupled = true;
      }
    }
    if (!coupled) {
      count.zero += static_cast<int>(left.size());
      left.clear();
    }
  }
  return count;
}

}  // namespace stanchion::test
