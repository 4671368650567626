#include "sparse/scaling.hpp"

#include <algorithm>
#include <atomic>
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

/// Work over columns by all threads; see for_column_ranges.
template <class Work>
void for_columns(const MatrixFamily& family, ThreadPool* pool, const Work& work) {
  for_column_ranges(pool, family.rows, family.column_start, column_ranges(pool, family.entries()), work);
}

std::vector<double> diagonal_of(const MatrixFamily& family, std::span<const double> coefficients,
                                ThreadPool* pool) {
  std::vector<double> diagonal(static_cast<std::size_t>(family.rows), 0);
  for_columns(family, pool, [&](Index first, Index last, int) {
    for (Index j = first; j < last; ++j) {
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        if (family.row[k] != j) continue;
        double sum = 0;
        for (std::size_t t = 0; t < coefficients.size(); ++t) sum += coefficients[t] * family.values[t][k];
        diagonal[static_cast<std::size_t>(j)] = sum;
      }
    }
  });
  return diagonal;
}

bool diagonal_dominates(const MatrixFamily& family, std::span<const double> coefficients,
                        const std::vector<double>& diagonal, ThreadPool* pool) {
  std::vector<double> root(diagonal.size());
  for (std::size_t i = 0; i < root.size(); ++i) {
    if (!(diagonal[i] > 0)) return false;
    root[i] = std::sqrt(diagonal[i]);
  }
  std::atomic<bool> dominates{true};
  for_columns(family, pool, [&](Index first, Index last, int) {
    for (Index j = first; j < last && dominates; ++j) {
      const double own = root[static_cast<std::size_t>(j)] * 1.000001;
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        // Also false for what is not a number.
        if (!(magnitude(family, coefficients, k) <= own * root[static_cast<std::size_t>(family.row[k])])) {
          dominates = false;
        }
      }
    }
  });
  return dominates;
}

/// Maximum-norm equilibration; works on exponents so that nothing overflows.
std::vector<double> equilibrated_exponents(const MatrixFamily& family, std::span<const double> coefficients,
                                           ThreadPool* pool) {
  const auto n = static_cast<std::size_t>(family.rows);
  std::vector<double> exponent(n, 0);
  Buffer<float> log_entry(family.entries());
  for_columns(family, pool, [&](Index first, Index last, int) {
    for (Offset k = family.column_start[first]; k < family.column_start[last]; ++k) {
      log_entry[k] = static_cast<float>(log2_or_least(magnitude(family, coefficients, k)));
    }
  });
  std::vector<std::vector<double>> largest(static_cast<std::size_t>(column_ranges(pool, family.entries())));
  for (int sweep = 0; sweep < kSweeps; ++sweep) {
    for_columns(family, pool, [&](Index first, Index last, int piece) {
      std::vector<double>& seen = largest[static_cast<std::size_t>(piece)];
      seen.assign(n, -1e9);
      for (Index j = first; j < last; ++j) {
        const auto jj = static_cast<std::size_t>(j);
        for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
          const auto ii = static_cast<std::size_t>(family.row[k]);
          const double scaled = static_cast<double>(log_entry[k]) + exponent[ii] + exponent[jj];
          seen[ii] = std::max(seen[ii], scaled);
          seen[jj] = std::max(seen[jj], scaled);
        }
      }
    });
    for (std::size_t i = 0; i < n; ++i) {
      double most = -1e9;
      for (const auto& seen : largest) most = std::max(most, seen[i]);
      if (most > -1e8) exponent[i] -= most / 2;
    }
  }
  return exponent;
}

/// The first entry that the scaling leaves out of range, if there is one.
Status range_checked(const MatrixFamily& family, std::span<const double> coefficients,
                     const Buffer<double>& scale) {
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
  return {};
}

}  // namespace

Result<Buffer<double>> power_of_two_scaling(const MatrixFamily& family, std::span<const double> coefficients,
                                            ThreadPool* pool) {
  constexpr double kMostExponent = 500;
  const std::vector<double> diagonal = diagonal_of(family, coefficients, pool);
  const bool dominates = diagonal_dominates(family, coefficients, diagonal, pool);
  std::vector<double> exponent;
  if (dominates) {
    exponent.resize(diagonal.size());
    for (std::size_t i = 0; i < diagonal.size(); ++i) exponent[i] = -std::log2(diagonal[i]) / 2;
  } else {
    exponent = equilibrated_exponents(family, coefficients, pool);
  }
  Buffer<double> scale(family.rows);
  bool clamped = false;
  for (Index i = 0; i < family.rows; ++i) {
    const double wanted = std::round(exponent[static_cast<std::size_t>(i)]);
    const double e = std::clamp(wanted, -kMostExponent, kMostExponent);
    clamped = clamped || e != wanted;
    scale[i] = std::ldexp(1.0, static_cast<int>(e));
  }
  // Below a dominating diagonal no scaled entry exceeds 2.1.
  if (!dominates || clamped) {
    if (Status checked = range_checked(family, coefficients, scale); !checked.ok()) return checked;
  }
  return scale;
}

}  // namespace stanchion
