#include "sparse/product.hpp"

#include <algorithm>
#include <cmath>
#include <vector>

namespace stanchion {
namespace {

template <class Size>
void multiply_with(const ShiftedMatrix& matrix, std::span<const double> x, std::span<double> y,
                   const Size& size) {
  std::fill(y.begin(), y.end(), 0.0);
  for (Index j = 0; j < matrix.family->rows; ++j) {
    const auto jj = static_cast<std::size_t>(j);
    double sum = 0;
    for_column_entries(matrix, j, [&](Index i, double value) {
      const double a = size(value);
      sum += a * x[static_cast<std::size_t>(i)];
      if (i != j) y[static_cast<std::size_t>(i)] += a * x[jj];
    });
    y[jj] += sum;
  }
}

}  // namespace

void multiply(const ShiftedMatrix& matrix, std::span<const double> x, std::span<double> y) {
  multiply_with(matrix, x, y, [](double value) { return value; });
}

void multiply_absolute(const ShiftedMatrix& matrix, std::span<const double> x, std::span<double> y) {
  multiply_with(matrix, x, y, [](double value) { return std::fabs(value); });
}

double infinity_norm(const ShiftedMatrix& matrix, ThreadPool* pool) {
  const MatrixFamily& family = *matrix.family;
  std::vector<double> sums[2];  // of the rows, by the columns of each half
  for_column_halves(pool, family.rows, family.column_start, [&](Index first, Index last, int half) {
    std::vector<double>& row_sum = sums[half];
    row_sum.assign(static_cast<std::size_t>(family.rows), 0.0);
    for (Index j = first; j < last; ++j) {
      double sum = 0;
      for_column_entries(matrix, j, [&](Index i, double value) {
        const double size = std::fabs(value);
        sum += size;
        if (i != j) row_sum[static_cast<std::size_t>(i)] += size;
      });
      row_sum[static_cast<std::size_t>(j)] += sum;
    }
  });
  double largest = 0;
  for (std::size_t i = 0; i < sums[0].size(); ++i) largest = std::max(largest, sums[0][i] + sums[1][i]);
  return largest;
}

}  // namespace stanchion
