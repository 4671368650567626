#include "order/weak_diagonal.hpp"

#include <cmath>

namespace stanchion {
namespace {

constexpr double kWeakShare = 0.01;
constexpr Index kWorthPairing = 10;  ///< one weak row in so many

}  // namespace

std::vector<char> weak_diagonals(const MatrixFamily& family, std::span<const double> coefficients) {
  std::vector<char> weak(static_cast<std::size_t>(family.rows), 0);
  Index found = 0;
  for (Index j = 0; j < family.rows; ++j) {
    const Offset at = family.column_start[j];
    if (at == family.column_start[Offset{j} + 1] || family.row[at] != j) continue;
    double sum = 0, size = 0;
    for (std::size_t t = 0; t < coefficients.size(); ++t) {
      const double term = coefficients[t] * family.values[t][at];
      sum += term;
      size += std::fabs(term);
    }
    if (size == 0 || std::fabs(sum) > kWeakShare * size) continue;
    weak[static_cast<std::size_t>(j)] = 1;
    ++found;
  }
  if (found < family.rows / kWorthPairing || found == 0) weak.clear();
  return weak;
}

}  // namespace stanchion
