#include "diagnose/local_accuracy.hpp"

#include <algorithm>
#include <cmath>

#include "base/counter_random.hpp"

namespace stanchion {

std::vector<double> estimate_digits_lost(const Structure& structure, KeptFactor& factor, Index vectors,
                                         std::uint64_t seed) {
  std::vector<double> sum(static_cast<std::size_t>(structure.rows), 0.0);
  for (Index done = 0; done < vectors; done += kBlockVectors) {
    Columns w(structure.rows, kBlockVectors);
    const CounterRandom random(seed, 0x616363757261ULL + static_cast<std::uint64_t>(done));
    for (std::size_t k = 0; k < w.values.size(); k += 2) {
      const auto [a, b] = random.gaussians(k / 2);
      w.values[k] = a;
      w.values[k + 1] = b;
    }
    factor.half_solve(w);
    for (Index i = 0; i < structure.rows; ++i) {
      for (Index v = 0; v < kBlockVectors; ++v) sum[static_cast<std::size_t>(i)] += w.row(i)[v] * w.row(i)[v];
    }
  }
  for (std::size_t i = 0; i < sum.size(); ++i) {
    // k_ii (K^-1)_ii is at least 1 for a positive definite matrix.
    sum[i] = std::log10(std::max(1.0, structure.diagonal[i] * sum[i] / vectors));
  }
  return sum;
}

}  // namespace stanchion
