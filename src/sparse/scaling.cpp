#include "sparse/scaling.hpp"

#include <algorithm>
#include <atomic>
#include <bit>
#include <cmath>
#include <cstdint>
#include <vector>

namespace stanchion {
namespace {

constexpr int kSweeps = 12, kMostExponent = 500;

/// Entries of a sum of members, by their place.
class Sum {
 public:
  Sum(const MatrixFamily& family, std::span<const double> coefficients)
      : family_(family), coefficients_(coefficients), first_(family.values[0].data()) {}
  double operator()(Offset k) const {
    double sum = coefficients_[0] * first_[k];
    for (std::size_t t = 1; t < coefficients_.size(); ++t) sum += coefficients_[t] * family_.values[t][k];
    return sum;
  }

 private:
  const MatrixFamily& family_;
  std::span<const double> coefficients_;
  const double* first_;
};

/// log2 of a positive number, or a very small number for zero.
double log2_or_least(double value) {
  return value > 0 ? std::log2(value) : -1e9;
}

/// Work over columns by all threads; see for_column_ranges.
template <class Work>
void for_columns(const MatrixFamily& family, ThreadPool* pool, const Work& work) {
  for_column_ranges(pool, family.rows, family.column_start, column_ranges(pool, family.entries()), work);
}

std::vector<double> diagonal_of(const MatrixFamily& family, const Sum& entry, ThreadPool* pool) {
  std::vector<double> diagonal(static_cast<std::size_t>(family.rows), 0);
  for_columns(family, pool, [&](Index first, Index last, int) {
    for (Index j = first; j < last; ++j) {
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        if (family.row[k] == j) diagonal[static_cast<std::size_t>(j)] = entry(k);
      }
    }
  });
  return diagonal;
}

bool diagonal_dominates(const MatrixFamily& family, const Sum& entry, const std::vector<double>& diagonal,
                        ThreadPool* pool) {
  std::vector<double> root(diagonal.size());
  for (std::size_t i = 0; i < root.size(); ++i) {
    if (!(diagonal[i] > 0 && diagonal[i] < INFINITY)) return false;
    root[i] = std::sqrt(diagonal[i]);
  }
  std::atomic<bool> dominates{true};
  for_columns(family, pool, [&](Index first, Index last, int) {
    for (Index j = first; j < last && dominates; ++j) {
      const double own = root[static_cast<std::size_t>(j)] * 1.000001;
      bool here = true;
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        // Also false for what is not a number.
        here &= std::fabs(entry(k)) <= own * root[static_cast<std::size_t>(family.row[k])];
      }
      if (!here) dominates = false;
    }
  });
  return dominates;
}

/// Maximum-norm equilibration; works on exponents so that nothing overflows.
std::vector<double> equilibrated_exponents(const MatrixFamily& family, const Sum& entry, ThreadPool* pool) {
  const auto n = static_cast<std::size_t>(family.rows);
  std::vector<double> exponent(n, 0);
  Buffer<float> log_entry(family.entries());
  for_columns(family, pool, [&](Index first, Index last, int) {
    for (Offset k = family.column_start[first]; k < family.column_start[last]; ++k) {
      log_entry[k] = static_cast<float>(log2_or_least(std::fabs(entry(k))));
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

/// e for which value 4^e lies in [1/2, 2), for a positive value.
int inverse_root_exponent(double value) {
  int exponent = 0;
  std::frexp(value, &exponent);
  return -(exponent >> 1);
}

int whole(double exponent) {
  return static_cast<int>(std::round(std::clamp(exponent, -1e6, 1e6)));
}

/// 2^e for |e| <= kMostExponent.
double power_of_two(int e) {
  return std::bit_cast<double>(static_cast<std::uint64_t>(1023 + e) << 52);
}

/// The first entry that the scaling leaves out of range, if there is one.
Status range_checked(const MatrixFamily& family, const Sum& entry, const Buffer<double>& scale) {
  for (Index j = 0; j < family.rows; ++j) {
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const double scaled = std::fabs(entry(k)) * scale[family.row[k]] * scale[j];
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
  const Sum entry(family, coefficients);
  const std::vector<double> diagonal = diagonal_of(family, entry, pool);
  const bool dominates = diagonal_dominates(family, entry, diagonal, pool);
  std::vector<double> exponent;
  if (!dominates) exponent = equilibrated_exponents(family, entry, pool);
  Buffer<double> scale(family.rows);
  bool clamped = false;
  for (Index i = 0; i < family.rows; ++i) {
    const auto at = static_cast<std::size_t>(i);
    const int wanted = dominates ? inverse_root_exponent(diagonal[at]) : whole(exponent[at]);
    const int e = std::clamp(wanted, -kMostExponent, kMostExponent);
    clamped = clamped || e != wanted;
    scale[i] = power_of_two(e);
  }
  // Below a dominating diagonal no scaled entry exceeds 2.1.
  if (!dominates || clamped) {
    if (Status checked = range_checked(family, entry, scale); !checked.ok()) return checked;
  }
  return scale;
}

}  // namespace stanchion
