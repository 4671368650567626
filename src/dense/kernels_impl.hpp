// The loops behind dense/kernels.hpp, included once per instruction set and scalar with STANCHION_KERNEL_ISA
// defined, and STANCHION_KERNEL_SINGLE for single precision.
// Everything here is local to its translation unit: no inline function of a header may be instantiated with
// instructions the processor might lack.

#include "dense/kernels.hpp"

namespace stanchion {
namespace {

#ifdef STANCHION_KERNEL_SINGLE
typedef float Real;
typedef int RealBits;
#else
typedef double Real;
typedef long long RealBits;
#endif
constexpr Real kLeastRealPivot = Rounding<Real>::kLeastPivot;
constexpr Real kInfinity = static_cast<Real>(__builtin_inf());

inline Real magnitude(Real x) {
  return static_cast<Real>(__builtin_fabs(x));
}
inline bool finite(Real x) {
  return __builtin_isfinite(x);
}

// As many lanes as a register holds: sums keep one order in each set, and the compiler may not reorder them
// itself.
#if defined(__AVX512F__)
#define STANCHION_LANE_BYTES 64
#elif defined(__AVX2__)
#define STANCHION_LANE_BYTES 32
#else
#define STANCHION_LANE_BYTES 16
#endif
typedef Real Lanes __attribute__((vector_size(STANCHION_LANE_BYTES)));
typedef RealBits LaneBits __attribute__((vector_size(STANCHION_LANE_BYTES)));
constexpr Index kLanes = STANCHION_LANE_BYTES / sizeof(Real);

inline Lanes load(const Real* p) {
  Lanes v;
  __builtin_memcpy(&v, p, sizeof(v));
  return v;
}
inline void store(Real* p, Lanes v) {
  __builtin_memcpy(p, &v, sizeof(v));
}
inline Lanes magnitude(Lanes v) {
  const LaneBits mask = LaneBits{} + static_cast<RealBits>(~(RealBits{1} << (8 * sizeof(Real) - 1)));
  return (Lanes)((LaneBits)v & mask);
}
inline Real sum_of(Lanes v) {
  Real sum = v[0];
  for (Index lane = 1; lane < kLanes; ++lane) sum += v[lane];
  return sum;
}

/// Largest |x_i|; infinite when one is not a number.
inline Real abs_max(const Real* x, Index count) {
  Lanes largest{}, probe{};
  Index i = 0;
  for (; i + kLanes <= count; i += kLanes) {
    const Lanes v = load(x + i), m = magnitude(v);
    largest = m > largest ? m : largest;
    probe += v * Real{0};
  }
  Real result = 0, check = sum_of(probe);
  for (Index lane = 0; lane < kLanes; ++lane) result = largest[lane] > result ? largest[lane] : result;
  for (; i < count; ++i) {
    result = magnitude(x[i]) > result ? magnitude(x[i]) : result;
    check += x[i] * Real{0};
  }
  return check == 0 ? result : kInfinity;
}

inline Real abs_sum_of(const Real* x, Index count) {
  Lanes sum{};
  Index i = 0;
  for (; i + kLanes <= count; i += kLanes) sum += magnitude(load(x + i));
  Real result = sum_of(sum);
  for (; i < count; ++i) result += magnitude(x[i]);
  return result;
}

void swap_rows_and_columns(Real* full, Index leading, Index width, Index a, Index b, Index* permutation) {
  if (a == b) return;
  for (Index i = 0; i < width; ++i) {
    const Real t = full[i + static_cast<long>(a) * leading];
    full[i + static_cast<long>(a) * leading] = full[i + static_cast<long>(b) * leading];
    full[i + static_cast<long>(b) * leading] = t;
  }
  for (Index j = 0; j < width; ++j) {
    const Real t = full[a + static_cast<long>(j) * leading];
    full[a + static_cast<long>(j) * leading] = full[b + static_cast<long>(j) * leading];
    full[b + static_cast<long>(j) * leading] = t;
  }
  const Index t = permutation[a];
  permutation[a] = permutation[b];
  permutation[b] = t;
}

struct LargestEntries {
  Index diagonal_at, row, column;
  Real diagonal, off_diagonal;
  bool all_finite;
};

LargestEntries search(const Real* full, Index leading, Index width, Index from) {
  LargestEntries found{from, from, from, 0, 0, true};
  for (Index j = from; j < width; ++j) {
    const Real* column = full + static_cast<long>(j) * leading;
    if (!finite(column[j])) found.all_finite = false;
    if (magnitude(column[j]) > found.diagonal) {
      found.diagonal = magnitude(column[j]);
      found.diagonal_at = j;
    }
    const Real largest = abs_max(column + j + 1, width - j - 1);
    if (!finite(largest)) found.all_finite = false;
    if (largest > found.off_diagonal) {
      found.off_diagonal = largest;
      for (Index i = j + 1; i < width; ++i) {
        if (magnitude(column[i]) == largest) {
          found.row = i;
          found.column = j;
          break;
        }
      }
    }
  }
  return found;
}

/// Row of multipliers through a 2x2 pivot [a b; b c]: x = (c/b f - g) / (b t), y = (a/b g - f) / (b t),
/// t = (a/b)(c/b) - 1. Backward stable since |a|, |c| <= kTwoByTwoShare |b|.
struct TwoByTwo {
  Real a_over_b, c_over_b, inverse;
  TwoByTwo(Real a, Real b, Real c) : a_over_b(a / b), c_over_b(c / b) {
    inverse = 1 / (b * (a_over_b * c_over_b - 1));
  }
  Real first(Real f, Real g) const { return (c_over_b * f - g) * inverse; }
  Real second(Real f, Real g) const { return (a_over_b * g - f) * inverse; }
};

void eliminate_one(Real* full, Index leading, Index width, Index k, PivotArrays pivots) {
  Real* column = full + static_cast<long>(k) * leading;
  const Real pivot = column[k], inverse = 1 / pivot;
  pivots.diagonal[k] = pivot;
  pivots.off_diagonal[k] = 0;
  pivots.kind[k] = PivotKind::kOne;
  for (Index i = k + 1; i < width; ++i) {
    full[k + static_cast<long>(i) * leading] = column[i];
    column[i] *= inverse;
  }
  for (Index j = k + 1; j < width; ++j) {
    Real* target = full + static_cast<long>(j) * leading;
    const Real w = target[k];
    for (Index i = k + 1; i < width; ++i) target[i] -= column[i] * w;
  }
}

void eliminate_two(Real* full, Index leading, Index width, Index k, PivotArrays pivots) {
  Real* first = full + static_cast<long>(k) * leading;
  Real* second = first + leading;
  const Real b = first[k + 1];
  const TwoByTwo solve(first[k], b, second[k + 1]);
  pivots.diagonal[k] = first[k];
  pivots.diagonal[k + 1] = second[k + 1];
  pivots.off_diagonal[k] = b;
  pivots.off_diagonal[k + 1] = 0;
  pivots.kind[k] = PivotKind::kTwoFirst;
  pivots.kind[k + 1] = PivotKind::kTwoSecond;
  for (Index i = k + 2; i < width; ++i) {
    const Real f = first[i], g = second[i];
    full[k + static_cast<long>(i) * leading] = f;
    full[k + 1 + static_cast<long>(i) * leading] = g;
    first[i] = solve.first(f, g);
    second[i] = solve.second(f, g);
  }
  first[k + 1] = 0;  // L is the identity inside the pivot
  full[k + static_cast<long>(k + 1) * leading] = b;
  for (Index j = k + 2; j < width; ++j) {
    Real* target = full + static_cast<long>(j) * leading;
    const Real f = target[k], g = target[k + 1];
    for (Index i = k + 2; i < width; ++i) target[i] -= first[i] * f + second[i] * g;
  }
}

Index factor_tile_pivoted(Real* tile, Index leading, Index width, PivotArrays pivots, Index* permutation) {
  for (Index j = 0; j < width; ++j) {
    permutation[j] = j;
    for (Index i = j + 1; i < width; ++i)
      tile[j + static_cast<long>(i) * leading] = tile[i + static_cast<long>(j) * leading];
  }
  Index k = 0;
  while (k < width) {
    const LargestEntries found = search(tile, leading, width, k);
    if (!found.all_finite || (found.diagonal < kLeastRealPivot && found.off_diagonal < kLeastRealPivot))
      break;
    if (found.diagonal >= kTwoByTwoShare * found.off_diagonal) {
      swap_rows_and_columns(tile, leading, width, k, found.diagonal_at, permutation);
      eliminate_one(tile, leading, width, k, pivots);
      k += 1;
    } else {
      swap_rows_and_columns(tile, leading, width, k, found.column, permutation);
      const Index row = found.row == k ? found.column : found.row;
      swap_rows_and_columns(tile, leading, width, k + 1, row, permutation);
      eliminate_two(tile, leading, width, k, pivots);
      k += 2;
    }
  }
  return k;
}

/// Four columns at a time, so that the row sums are loaded and stored a quarter as often.
void weighted_abs_sums(const Real* a, Index leading, Index rows, Index columns, const Real* weight,
                       Real* row_sum, Real* column_sum) {
  Index k = 0;
  for (; k + 4 <= columns; k += 4) {
    const Real* column[4];
    Lanes sum[4]{};
    Real w[4], tail[4]{};
    for (int c = 0; c < 4; ++c) {
      column[c] = a + static_cast<long>(k + c) * leading;
      w[c] = weight[k + c];
    }
    Index i = 0;
    for (; i + kLanes <= rows; i += kLanes) {
      Lanes total = load(row_sum + i);
      for (int c = 0; c < 4; ++c) {
        const Lanes m = magnitude(load(column[c] + i));
        total += m * w[c];
        sum[c] += m;
      }
      store(row_sum + i, total);
    }
    for (; i < rows; ++i) {
      for (int c = 0; c < 4; ++c) {
        row_sum[i] += magnitude(column[c][i]) * w[c];
        tail[c] += magnitude(column[c][i]);
      }
    }
    for (int c = 0; column_sum && c < 4; ++c) column_sum[k + c] += sum_of(sum[c]) + tail[c];
  }
  for (; k < columns; ++k) {
    const Real* column = a + static_cast<long>(k) * leading;
    for (Index i = 0; i < rows; ++i) row_sum[i] += magnitude(column[i]) * weight[k];
    if (column_sum) column_sum[k] += abs_sum_of(column, rows);
  }
}

Real copy_with_abs_sums(const Real* source, Index count, Real* destination, Real* row_sum) {
  Lanes sum{};
  Index i = 0;
  for (; i + kLanes <= count; i += kLanes) {
    const Lanes v = load(source + i), m = magnitude(v);
    store(destination + i, v);
    store(row_sum + i, load(row_sum + i) + m);
    sum += m;
  }
  Real total = sum_of(sum);
  for (; i < count; ++i) {
    const Real value = source[i];
    destination[i] = value;
    row_sum[i] += magnitude(value);
    total += magnitude(value);
  }
  return total;
}

}  // namespace
}  // namespace stanchion

#include "dense/kernels_product.hpp"
#include "dense/kernels_tile.hpp"

namespace stanchion {
namespace STANCHION_KERNEL_ISA {
#ifdef STANCHION_KERNEL_SINGLE
#define STANCHION_KERNEL_TABLE single_table
#else
#define STANCHION_KERNEL_TABLE table
#endif
extern const KernelSet<Real> STANCHION_KERNEL_TABLE;
const KernelSet<Real> STANCHION_KERNEL_TABLE{
    STANCHION_KERNEL_NAME, kRowStrip,           kColumnStrip,      kLanes,
    factor_tile,           factor_tile_pivoted, invert_unit_lower, weighted_abs_sums,
    copy_with_abs_sums,    pack_left,           pack_right,        multiply_by_upper,
    subtract_product,      strips_abs_max,      divide_strips,     strips_growth_and_image};
}  // namespace STANCHION_KERNEL_ISA
}  // namespace stanchion
