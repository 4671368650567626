// Small dense symmetric matrices of one element, and the Gauss rule that fills them.
#pragma once

#include <array>
#include <cstddef>
#include <span>

namespace stanchion::specimen {

/// An `n` by `n` matrix, row by row. Every element routine fills both triangles with identical bits.
template <int n>
struct ElementMatrix {
  std::array<double, static_cast<std::size_t>(n) * n> entry{};

  double& operator()(int i, int j) { return entry[std::size_t(i) * n + std::size_t(j)]; }
  double operator()(int i, int j) const { return entry[std::size_t(i) * n + std::size_t(j)]; }
};

template <int rows, int columns>
using Table =
    std::array<std::array<double, static_cast<std::size_t>(columns)>, static_cast<std::size_t>(rows)>;

/// target += weight * B^T D B, for symmetric D; the lower triangle is mirrored, so that symmetry is exact.
template <int rows, int n>
void add_gram(ElementMatrix<n>& target, const Table<rows, n>& b, const Table<rows, rows>& d, double weight) {
  Table<rows, n> db{};
  for (std::size_t r = 0; r < rows; ++r) {
    for (std::size_t s = 0; s < rows; ++s) {
      for (std::size_t j = 0; j < n; ++j) db[r][j] += d[r][s] * b[s][j];
    }
  }
  for (int i = 0; i < n; ++i) {
    for (int j = 0; j <= i; ++j) {
      double sum = 0;
      for (std::size_t r = 0; r < rows; ++r) {
        sum += b[r][static_cast<std::size_t>(i)] * db[r][static_cast<std::size_t>(j)];
      }
      target(i, j) += weight * sum;
      if (i != j) target(j, i) = target(i, j);
    }
  }
}

/// target = T^T source T, mirrored likewise.
template <int n>
ElementMatrix<n> congruence(const ElementMatrix<n>& source, const ElementMatrix<n>& t) {
  ElementMatrix<n> half, result;
  for (int i = 0; i < n; ++i) {
    for (int k = 0; k < n; ++k) {
      const double s = source(i, k);
      if (s == 0) continue;
      for (int j = 0; j < n; ++j) half(i, j) += s * t(k, j);
    }
  }
  for (int i = 0; i < n; ++i) {
    for (int j = 0; j <= i; ++j) {
      double sum = 0;
      for (int k = 0; k < n; ++k) sum += t(k, i) * half(k, j);
      result(i, j) = result(j, i) = sum;
    }
  }
  return result;
}

struct GaussPoint {
  double position, weight;
};

/// The two-point rule on [-1, 1]: exact to degree 3.
inline constexpr std::array<GaussPoint, 2> kGauss2{
    {{-0.57735026918962576451, 1.0}, {0.57735026918962576451, 1.0}}};

/// The four-point rule on [-1, 1]: exact to degree 7.
inline constexpr std::array<GaussPoint, 4> kGauss4{{{-0.86113631159405257522, 0.34785484513745385737},
                                                    {-0.33998104358485626480, 0.65214515486254614263},
                                                    {0.33998104358485626480, 0.65214515486254614263},
                                                    {0.86113631159405257522, 0.34785484513745385737}}};

}  // namespace stanchion::specimen
