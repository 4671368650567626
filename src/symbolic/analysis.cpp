#include "symbolic/analysis.hpp"

#include <algorithm>
#include <memory>
#include <new>

#include "base/clock.hpp"
#include "base/threads.hpp"

namespace stanchion {

namespace {

constexpr Index kSeveralThreadsFrom = 1'000;  // supernodes; fewer are listed while threads start

Result<Analysis> analyse_or_throw(const OrderingInput& input, int workers) {
  Analysis analysis;
  Stopwatch watch;
  OrderingInput by_all = input;
  by_all.threads = workers;
  auto elimination = order_equations(by_all);
  if (!elimination.ok()) return elimination.status();
  analysis.order_seconds = watch.seconds();
  analysis.known_order = elimination->known;
  watch.restart();
  const SupernodeTree supernodes = build_supernodes(*elimination);
  std::unique_ptr<ThreadPool> pool;
  if (workers > 1 && supernodes.supernodes > kSeveralThreadsFrom)
    pool = std::make_unique<ThreadPool>(workers);
  analysis.tree = build_assembly_tree(*elimination, supernodes, pool.get());
  analysis.schedule = make_schedule(analysis.tree, workers);
  StructureForecast& forecast = analysis.forecast;
  forecast.factor_entries = supernodes.factor_entries;
  forecast.factor_flops = supernodes.flops;
  for (Index f = 0; f < analysis.tree.fronts; ++f) {
    const Offset order = analysis.tree.order(f), pivots = analysis.tree.pivots(f);
    forecast.front_flops += front_flops(analysis.tree.order(f), analysis.tree.pivots(f));
    forecast.stored_factor_entries += pivots * order;
    forecast.largest_front = std::max(forecast.largest_front, analysis.tree.order(f));
  }
  const PeakBytes peak = peak_bytes(analysis, workers);
  forecast.peak_bytes_count = peak.count;
  forecast.peak_bytes_solve = peak.solve;
  forecast.peak_bytes_single = peak.single;
  analysis.analyse_seconds = watch.seconds();
  return analysis;
}

}  // namespace

PeakBytes peak_bytes(const Analysis& analysis, int workers) {
  constexpr Offset kDouble = sizeof(double), kSingle = sizeof(float);
  // The vector that detects faults: its sign, its product and the product's bound, a row.
  constexpr Offset kFaultProbe = 1 + 2 * kDouble;
  // A kept factor serves blocks of eight vectors: the relative test holds ten of them and a few sums a row.
  constexpr Offset kTest = (10 * 8 + 4) * kDouble;
  const Offset doubles = peak_doubles_of(analysis.tree, analysis.schedule, workers),
               rows = analysis.tree.rows, kept = analysis.forecast.stored_factor_entries;
  const Offset fronts = doubles * kDouble + rows * kFaultProbe;
  const Offset single_fronts = doubles * kSingle + rows * kFaultProbe;
  return {fronts, std::max(fronts, rows * kTest) + kept * kDouble,
          std::max(single_fronts, rows * kTest) + kept * kSingle};
}

Result<Analysis> analyse(const OrderingInput& input, int workers) {
  try {
    return analyse_or_throw(input, workers);
  } catch (const std::bad_alloc&) {
    return Status::resource_limit("out-of-memory", "the system has no more memory for the analysis", "",
                                  "free memory, or give --dofs so that nodes, not equations, are ordered");
  }
}

}  // namespace stanchion
