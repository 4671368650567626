#include <algorithm>
#include <vector>

#include "base/clock.hpp"
#include "extended/eliminate.hpp"
#include "extended/factorize.hpp"

namespace stanchion {
namespace {

constexpr Index kTimedRows = 128;
/// What is spent besides products, in seconds: assembling and handing on one entry of a front; starting one
/// call of the inner loop (one a column of the front and pivot, inside a panel); forming and booking one row;
/// one entry of L in the image that detects faults. Measured on a server of 2023; a slower machine has slower
/// products too.
constexpr double kSecondsPerEntry = 8e-9, kSecondsPerCall = 14e-9, kSecondsPerRow = 2e-7,
                 kSecondsPerImage = 1e-8;
/// Share of the speed of the bare loop that whole fronts reach.
constexpr double kEfficiency = 0.8;

/// Products taken off per second by one thread.
double products_per_second() {
  constexpr Offset kPlane = Offset{kTimedRows} * (kExtendedPanel + 1);
  std::vector<double> storage(static_cast<std::size_t>(2 * kPlane), 0.0);
  std::fill_n(storage.begin(), kPlane, 1.0);
  const Strip<DoubleDouble> c{storage.data(), kPlane}, l{storage.data() + kTimedRows, kPlane};
  const std::vector<DoubleDouble> factors(kExtendedPanel, DoubleDouble{0x1p-30, 0});
  const auto& kernels = scalar_kernels<DoubleDouble>();
  double fastest = 1e9;
  for (int round = 0; round < 20; ++round) {
    const Stopwatch watch;
    kernels.subtract_products(c, l, kTimedRows, factors.data(), kTimedRows, kExtendedPanel);
    fastest = std::min(fastest, std::max(watch.seconds(), 1e-9));
  }
  return Offset{kTimedRows} * kExtendedPanel / fastest;
}

}  // namespace

double extended_seconds_forecast(const Analysis& analysis) {
  const AssemblyTree& tree = analysis.tree;
  double products = 0, overhead = kSecondsPerRow * tree.rows;
  for (Index f = 0; f < tree.fronts; ++f) {
    const double order = tree.order(f), pivots = tree.pivots(f);
    const double panel = std::min<double>(pivots, kExtendedPanel);
    products += front_flops(tree.order(f), tree.pivots(f)) / 2;
    overhead += kSecondsPerEntry * order * (order + 1) / 2 + kSecondsPerCall * (pivots * panel / 2 + order);
    overhead += kSecondsPerImage * order * pivots;
  }
  const double workers = std::max(1, analysis.schedule.workers);
  return (products / (kEfficiency * products_per_second()) + overhead) / workers;
}

Offset extended_peak_bytes_forecast(const Analysis& analysis) {
  return 2 * analysis.forecast.peak_bytes_count;
}

}  // namespace stanchion
