#include "sparse/scaling.hpp"

#include <algorithm>
#include <cmath>
#include <vector>

namespace stanchion {
namespace {

constexpr int kSweeps = 12;

double magnitude(const MatrixFamily& family, std::span<const double> coefficients, Offset k) {
  double sum = 0;
  for (std::size_t t = 0; t < coefficients.size(); ++t) sum += coefficients[t] * family.values[t][k];
  return std::fabs(sum);
}

/// log2 of a positive number, or a very small number for zero.
double log2_or_least(double value) {
  return value > 0 ? std::log2(value) : -1e9;
}

std::vector<double> diagonal_of(const MatrixFamily& family, std::span<const double> coefficients) {
  std::vector<double> diagonal(static_cast<std::size_t>(family.rows), 0);
  for (Index j = 0; j < family.rows; ++j) {
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      if (family.row[k] != j) continue;
      double sum = 0;
      for (std::size_t t = 0; t < coefficients.size(); ++t) sum += coefficients[t] * family.values[t][k];
      diagonal[static_cast<std::size_t>(j)] = sum;
    }
  }
  return diagonal;
}

bool diagonal_dominates(const MatrixFamily& family, std::span<const double> coefficients,
                        const std::vector<double>& diagonal) {
  std::vector<double> root(diagonal.size());
  for (std::size_t i = 0; i < root.size(); ++i) {
    if (!(diagonal[i] > 0)) return false;
    root[i] = std::sqrt(diagonal[i]);
  }
  for (Index j = 0; j < family.rows; ++j) {
    const double own = root[static_cast<std::size_t>(j)] * 1.000001;
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      if (magnitude(family, coefficients, k) > own * root[static_cast<std::size_t>(family.row[k])])
        return false;
    }
  }
  return true;
}

/// Maximum-norm equilibration; works on exponents so that nothing overflows.
std::vector<double> equilibrated_exponents(const MatrixFamily& family, std::span<const double> coefficients) {
  const Index n = family.rows;
  std::vector<double> exponent(static_cast<std::size_t>(n), 0), largest(static_cast<std::size_t>(n));
  Buffer<float> log_entry(family.entries());
  for (Offset k = 0; k < family.entries(); ++k) {
    log_entry[k] = static_cast<float>(log2_or_least(magnitude(family, coefficients, k)));
  }
  for (int sweep = 0; sweep < kSweeps; ++sweep) {
    std::fill(largest.begin(), largest.end(), -1e9);
    for (Index j = 0; j < n; ++j) {
      const auto jj = static_cast<std::size_t>(j);
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const auto ii = static_cast<std::size_t>(family.row[k]);
        const double scaled = static_cast<double>(log_entry[k]) + exponent[ii] + exponent[jj];
        largest[ii] = std::max(largest[ii], scaled);
        largest[jj] = std::max(largest[jj], scaled);
      }
    }
    for (std::size_t i = 0; i < exponent.size(); ++i) {
      if (largest[i] > -1e8) exponent[i] -= largest[i] / 2;
    }
  }
  return exponent;
}

}  // namespace

Result<Buffer<double>> power_of_two_scaling(const MatrixFamily& family,
                                            std::span<const double> coefficients) {
  const std::vector<double> diagonal = diagonal_of(family, coefficients);
  std::vector<double> exponent;
  if (diagonal_dominates(family, coefficients, diagonal)) {
    exponent.resize(diagonal.size());
    for (std::size_t i = 0; i < diagonal.size(); ++i) exponent[i] = -std::log2(diagonal[i]) / 2;
  } else {
    exponent = equilibrated_exponents(family, coefficients);
  }
  Buffer<double> scale(family.rows);
  for (Index i = 0; i < family.rows; ++i) {
    const double e = std::clamp(std::round(exponent[static_cast<std::size_t>(i)]), -500.0, 500.0);
    scale[i] = std::ldexp(1.0, static_cast<int>(e));
  }
  for (Index j = 0; j < family.rows; ++j) {
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const double scaled = magnitude(family, coefficients, k) * scale[family.row[k]] * scale[j];
      if (scaled <= 0x1p900) continue;
      return Status::bad_input(
          "scaling-range", "the entries span more orders of magnitude than doubles can hold",
          "row " + std::to_string(family.row[k] + 1) + ", column " + std::to_string(j + 1),
          "check the units of this entry");
    }
  }
  return scale;
}

}  // namespace stanchion
