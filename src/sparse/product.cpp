#include "sparse/product.hpp"

#include <algorithm>
#include <cmath>
#include <vector>

namespace stanchion {
namespace {

template <class Entry>
void multiply_with(const ShiftedMatrix& matrix, std::span<const double> x, std::span<double> y,
                   const Entry& value) {
  const MatrixFamily& family = *matrix.family;
  std::fill(y.begin(), y.end(), 0.0);
  for (Index j = 0; j < family.rows; ++j) {
    const auto jj = static_cast<std::size_t>(j);
    double sum = 0;
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      const double a = value(k, i, j);
      sum += a * x[static_cast<std::size_t>(i)];
      if (i != j) y[static_cast<std::size_t>(i)] += a * x[jj];
    }
    y[jj] += sum;
  }
}

}  // namespace

void multiply(const ShiftedMatrix& matrix, std::span<const double> x, std::span<double> y) {
  multiply_with(matrix, x, y, [&](Offset k, Index i, Index j) {
    return matrix.entry(k, i, j) - (i == j ? matrix.offset : 0.0);
  });
}

void multiply_absolute(const ShiftedMatrix& matrix, std::span<const double> x, std::span<double> y) {
  multiply_with(matrix, x, y, [&](Offset k, Index i, Index j) {
    return std::fabs(matrix.entry(k, i, j) - (i == j ? matrix.offset : 0.0));
  });
}

double infinity_norm(const ShiftedMatrix& matrix, ThreadPool* pool) {
  const MatrixFamily& family = *matrix.family;
  std::vector<double> lower(static_cast<std::size_t>(family.rows), 0.0), upper(lower.size());
  const auto for_entries = [&](Index j, const auto& use) {
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      use(i, std::fabs(matrix.entry(k, i, j) - (i == j ? matrix.offset : 0.0)));
    }
  };
  for_both_triangles(
      pool, family.rows,
      [&](Index j) {
        double sum = 0;
        for_entries(j, [&](Index, double size) { sum += size; });
        upper[static_cast<std::size_t>(j)] = sum;
      },
      [&](Index j) {
        for_entries(j, [&](Index i, double size) {
          if (i != j) lower[static_cast<std::size_t>(i)] += size;
        });
      });
  double largest = 0;
  for (std::size_t i = 0; i < lower.size(); ++i) largest = std::max(largest, lower[i] + upper[i]);
  return largest;
}

}  // namespace stanchion
