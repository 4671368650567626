#include "numeric/fault_probe.hpp"

#include <bit>
#include <cmath>

#include "base/counter_random.hpp"

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

FaultProbe draw_fault_probe(const ShiftedMatrix& matrix, std::uint64_t seed) {
  const MatrixFamily& family = *matrix.family;
  FaultProbe probe{draw_signs(family.rows, seed, matrix.offset), Buffer<double>(family.rows, 0.0),
                   Buffer<double>(family.rows, 0.0)};
  const auto add_to = [&](Index row, double term) {
    probe.product[row] += term;
    probe.product_error[row] += std::fabs(probe.product[row]);
  };
  for (Index j = 0; j < family.rows; ++j) {
    const double sign_j = probe.sign[j];
    TrackedSum column;
    for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
      const Index i = family.row[k];
      double value = matrix.entry(k, i, j);
      if (i == j) value -= matrix.offset;
      column.add(value * probe.sign[i]);
      if (i != j) add_to(i, value * sign_j);
    }
    add_to(j, column.value);
    probe.product_error[j] += column.sizes;
  }
  for (Index i = 0; i < family.rows; ++i) probe.product_error[i] *= kUnit;
  return probe;
}

}  // namespace stanchion
