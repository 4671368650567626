// Exact and nearly exact arithmetic to hold double-double against.
#pragma once

#include <array>
#include <boost/multiprecision/cpp_bin_float.hpp>
#include <boost/multiprecision/cpp_int.hpp>
#include <utility>
#include <vector>

#include "base/double_double.hpp"
#include "sparse/symmetric_matrix.hpp"

namespace stanchion::test {

/// 1024 bits: sums and products of doubles of moderate exponents are exact in it.
using Long = boost::multiprecision::number<
    boost::multiprecision::cpp_bin_float<1024, boost::multiprecision::digit_base_2>,
    boost::multiprecision::et_off>;
using Rational = boost::multiprecision::cpp_rational;

inline Long to_long(double x) {
  return Long(x);
}
inline Long to_long(DoubleDouble x) {
  return Long(x.hi) + Long(x.lo);
}

/// Numbers of negative, zero and positive eigenvalues of `matrix` - shift I, without any rounding: symmetric
/// elimination over the rationals. A zero diagonal with a non-zero column counts one of either sign and both
/// rows are eliminated together. Cost: rows^3 operations on growing numbers; for rows up to about 40.
inline std::array<Offset, 3> exact_inertia(const SymmetricMatrix& matrix, const Rational& shift = 0) {
  const auto n = static_cast<std::size_t>(matrix.rows);
  std::vector<std::vector<Rational>> a(n, std::vector<Rational>(n, 0));
  for (Index j = 0; j < matrix.rows; ++j) {
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      const auto i = static_cast<std::size_t>(matrix.row[k]), jj = static_cast<std::size_t>(j);
      a[i][jj] = a[jj][i] = Rational(matrix.value[k]);
    }
  }
  for (std::size_t i = 0; i < n; ++i) a[i][i] -= shift;
  const auto swap_both = [&](std::size_t i, std::size_t j) {
    std::swap(a[i], a[j]);
    for (auto& row : a) std::swap(row[i], row[j]);
  };
  std::array<Offset, 3> count{};
  std::size_t k = 0;
  while (k < n) {
    std::size_t p = k;
    while (p < n && a[p][p] == 0) ++p;
    if (p < n) {
      swap_both(k, p);
      ++count[a[k][k] < 0 ? 0 : 2];
      for (std::size_t i = k + 1; i < n; ++i) {
        if (a[i][k] == 0) continue;
        const Rational l = a[i][k] / a[k][k];
        for (std::size_t j = k + 1; j < n; ++j) a[i][j] -= l * a[k][j];
      }
      ++k;
      continue;
    }
    // The whole diagonal is zero: a pair with b != 0 is [0 b; b 0], one eigenvalue of either sign.
    std::size_t r = k, c = k;
    for (std::size_t i = k; i < n && r == c; ++i) {
      for (std::size_t j = k; j < i && r == c; ++j) {
        if (a[i][j] != 0) r = i, c = j;
      }
    }
    if (r == c) {
      count[1] += static_cast<Offset>(n - k);
      break;
    }
    swap_both(k, c);  // c < r, so r stays in place
    swap_both(k + 1, r);
    ++count[0];
    ++count[2];
    const Rational b = a[k + 1][k];
    for (std::size_t i = k + 2; i < n; ++i) {
      const Rational x = a[i][k + 1] / b, y = a[i][k] / b;
      for (std::size_t j = k + 2; j < n; ++j) a[i][j] -= x * a[k][j] + y * a[k + 1][j];
    }
    k += 2;
  }
  return count;
}

}  // namespace stanchion::test
