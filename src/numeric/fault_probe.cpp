#include "numeric/fault_probe.hpp"

#include <bit>
#include <cmath>

#include "base/counter_random.hpp"
#include "sparse/product.hpp"

namespace stanchion {
namespace {

constexpr double kUnit = 0x1p-53;

/// A sum with the sizes of its partial sums: each addition rounds by at most a unit of its result, and
/// multiplying by a sign is exact.
struct TrackedSum {
  double value = 0, sizes = 0;
  void add(double term) {
    value += term;
    sizes += std::fabs(value);
  }
};

}  // namespace

Buffer<signed char> draw_signs(Index rows, std::uint64_t seed, double offset) {
  const CounterRandom random(seed, std::bit_cast<std::uint64_t>(offset));
  Buffer<signed char> sign(rows);
  std::uint64_t bits = 0;
  for (Index i = 0; i < rows; ++i) {
    if (i % 64 == 0) bits = random.bits(static_cast<std::uint64_t>(i / 64));
    sign[i] = (bits & 1) != 0 ? 1 : -1;
    bits >>= 1;
  }
  return sign;
}

FaultProbe draw_fault_probe(const ShiftedMatrix& matrix, std::uint64_t seed, ThreadPool* pool) {
  const MatrixFamily& family = *matrix.family;
  FaultProbe probe{draw_signs(family.rows, seed, matrix.offset), Buffer<double>(family.rows),
                   Buffer<double>(family.rows)};
  const signed char* sign = probe.sign.data();
  Buffer<TrackedSum> sums[2];  // of the rows, by the columns of each half
  for_column_halves(pool, family.rows, family.column_start, [&](Index first, Index last, int half) {
    sums[half] = Buffer<TrackedSum>(family.rows, TrackedSum{});
    TrackedSum* of_row = sums[half].data();
    for (Index j = first; j < last; ++j) {
      double value_along = 0, sizes_along = 0;
      const double own = sign[j];
      for_column_entries(matrix, j, [&](Index i, double value) {
        value_along += value * sign[i];
        sizes_along += std::fabs(value);
        if (i != j) of_row[i].add(value * own);
      });
      // Any partial sum along the column is at most the sum of all sizes.
      const Offset terms = family.column_start[Offset{j} + 1] - family.column_start[j];
      of_row[j].sizes += static_cast<double>(terms) * sizes_along;
      of_row[j].add(value_along);
    }
  });
  for (Index i = 0; i < family.rows; ++i) {
    TrackedSum sum = sums[0][i];
    sum.add(sums[1][i].value);
    probe.product[i] = sum.value;
    probe.product_error[i] = (sum.sizes + sums[1][i].sizes) * kUnit;
  }
  return probe;
}

}  // namespace stanchion
