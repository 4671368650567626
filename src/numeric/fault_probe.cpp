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
  FaultProbe probe{draw_signs(family.rows, seed, matrix.offset), Buffer<double>(family.rows, 0.0),
                   Buffer<double>(family.rows, 0.0)};
  Buffer<TrackedSum> along_column(family.rows);
  for_both_triangles(
      pool, family.rows,
      [&](Index j) {
        TrackedSum sum;
        for_column_entries(matrix, j, [&](Index i, double value) { sum.add(value * probe.sign[i]); });
        along_column[j] = sum;
      },
      [&](Index j) {
        for_column_entries(matrix, j, [&](Index i, double value) {
          if (i == j) return;
          probe.product[i] += value * probe.sign[j];
          probe.product_error[i] += std::fabs(probe.product[i]);
        });
      });
  for (Index i = 0; i < family.rows; ++i) {
    const TrackedSum& sum = along_column[i];
    probe.product[i] += sum.value;
    probe.product_error[i] = (probe.product_error[i] + std::fabs(probe.product[i]) + sum.sizes) * kUnit;
  }
  return probe;
}

}  // namespace stanchion
