// One benchmark a kernel, of the same name, for every instruction set this processor runs. Rates count
// multiply-adds as two operations and every double read or written once.
#include <benchmark/benchmark.h>

#include <random>
#include <string>
#include <vector>

#include "dense/kernels.hpp"

namespace stanchion {
namespace {

std::vector<double> random_values(std::size_t count) {
  std::mt19937_64 random(1);
  std::uniform_real_distribution<double> distribution(-1, 1);
  std::vector<double> values(count);
  for (double& v : values) v = distribution(random);
  return values;
}

/// A tile and its pivots; restored before every run.
struct TileBench {
  Index width;
  std::vector<double> original, tile;
  std::vector<double> diagonal, off_diagonal;
  std::vector<PivotKind> kind;
  std::vector<Index> permutation;

  explicit TileBench(Index width_in, double shift) : width(width_in) {
    const auto w = static_cast<std::size_t>(width);
    original = random_values(w * kTileWidth);
    for (Index i = 0; i < width; ++i) original[static_cast<std::size_t>(i * kTileWidth + i)] += shift;
    tile = original;
    diagonal.resize(w), off_diagonal.resize(w), kind.resize(w, PivotKind::kOne), permutation.resize(w);
  }
  PivotArrays pivots() { return {diagonal.data(), off_diagonal.data(), kind.data()}; }
};

void set_flops(benchmark::State& state, double flops) {
  state.counters["FLOPS"] = benchmark::Counter(flops, benchmark::Counter::kIsIterationInvariantRate,
                                               benchmark::Counter::OneK::kIs1000);
}

void set_bytes(benchmark::State& state, Offset doubles) {
  state.SetBytesProcessed(state.iterations() * doubles * static_cast<Offset>(sizeof(double)));
}

void factor_tile(benchmark::State& state, const Kernels& set) {
  TileBench bench(static_cast<Index>(state.range(0)), 70);
  for (auto _ : state) {
    bench.tile = bench.original;
    benchmark::DoNotOptimize(
        set.factor_tile(bench.tile.data(), kTileWidth, bench.width, false, 100, bench.pivots()));
  }
  const double w = bench.width;
  set_flops(state, w * w * w / 3);
}

void factor_tile_pivoted(benchmark::State& state, const Kernels& set) {
  TileBench bench(static_cast<Index>(state.range(0)), 0);
  for (auto _ : state) {
    bench.tile = bench.original;
    benchmark::DoNotOptimize(set.factor_tile_pivoted(bench.tile.data(), kTileWidth, bench.width,
                                                     bench.pivots(), bench.permutation.data()));
  }
  const double w = bench.width;
  set_flops(state, w * w * w / 3);
}

void invert_unit_lower(benchmark::State& state, const Kernels& set) {
  TileBench bench(static_cast<Index>(state.range(0)), 0);
  std::vector<double> inverse(bench.original.size());
  for (auto& v : bench.original) v /= 64;
  for (auto _ : state) {
    set.invert_unit_lower(bench.original.data(), kTileWidth, bench.width, inverse.data(), kTileWidth);
    benchmark::DoNotOptimize(inverse.data());
    benchmark::ClobberMemory();
  }
  const double w = bench.width;
  set_flops(state, w * w * w / 3);
}

void column_abs_max(benchmark::State& state, const Kernels& set) {
  const auto rows = static_cast<Index>(state.range(0));
  const auto w = random_values(static_cast<std::size_t>(rows) * kTileWidth);
  std::vector<double> out(kTileWidth);
  for (auto _ : state) {
    set.column_abs_max(w.data(), rows, rows, kTileWidth, out.data());
    benchmark::DoNotOptimize(out.data());
    benchmark::ClobberMemory();
  }
  set_bytes(state, Offset{rows} * kTileWidth);
}

void divide_by_pivots(benchmark::State& state, const Kernels& set) {
  const auto rows = static_cast<Index>(state.range(0));
  TileBench bench(kTileWidth, 0);
  std::vector<double> sign(static_cast<std::size_t>(rows), 1.0), signed_sum(kTileWidth, 0.0);
  for (auto& d : bench.diagonal) d = 0.5;
  const auto w = random_values(static_cast<std::size_t>(rows) * kTileWidth);
  std::vector<double> l(w.size()), sum(kTileWidth);
  for (auto _ : state) {
    set.divide_by_pivots(w.data(), rows, l.data(), rows, rows, kTileWidth, bench.pivots(), sign.data(), sum.data(),
                         signed_sum.data());
    benchmark::DoNotOptimize(l.data());
    benchmark::ClobberMemory();
  }
  set_bytes(state, Offset{2} * rows * kTileWidth);
}

void weighted_abs_sums(benchmark::State& state, const Kernels& set) {
  const auto rows = static_cast<Index>(state.range(0));
  const auto a = random_values(static_cast<std::size_t>(rows) * kTileWidth);
  std::vector<double> weight(kTileWidth, 1e-16), row_sum(static_cast<std::size_t>(rows)),
      column_sum(kTileWidth);
  for (auto _ : state) {
    set.weighted_abs_sums(a.data(), rows, rows, kTileWidth, weight.data(), row_sum.data(), column_sum.data());
    benchmark::DoNotOptimize(row_sum.data());
    benchmark::ClobberMemory();
  }
  set_bytes(state, Offset{rows} * kTileWidth);
}

void copy_with_abs_sums(benchmark::State& state, const Kernels& set) {
  const auto rows = static_cast<Index>(state.range(0));
  const auto source = random_values(static_cast<std::size_t>(rows));
  std::vector<double> destination(source.size()), row_sum(source.size());
  for (auto _ : state) {
    benchmark::DoNotOptimize(set.copy_with_abs_sums(source.data(), rows, destination.data(), row_sum.data()));
    benchmark::ClobberMemory();
  }
  set_bytes(state, Offset{4} * rows);
}

using Body = void (*)(benchmark::State&, const Kernels&);

void add(const char* name, Body body, const Kernels& set, std::initializer_list<Index> sizes) {
  const std::string title = std::string(name) + "/" + set.isa;
  for (const Index size : sizes) {
    benchmark::RegisterBenchmark(title.c_str(), [body, &set](benchmark::State& state) {
      body(state, set);
    })->Arg(size);
  }
}

}  // namespace
}  // namespace stanchion

int main(int argc, char** argv) {
  using namespace stanchion;
  const Kernels* sets[3];
  const int count = kernel_sets(sets);
  for (int s = 0; s < count; ++s) {
    add("factor_tile", factor_tile, *sets[s], {8, 16, 32, 64});
    add("factor_tile_pivoted", factor_tile_pivoted, *sets[s], {8, 16, 32, 64});
    add("invert_unit_lower", invert_unit_lower, *sets[s], {8, 16, 32, 64});
    add("column_abs_max", column_abs_max, *sets[s], {64, 256, 2048});
    add("divide_by_pivots", divide_by_pivots, *sets[s], {64, 256, 2048});
    add("weighted_abs_sums", weighted_abs_sums, *sets[s], {64, 256, 2048});
    add("copy_with_abs_sums", copy_with_abs_sums, *sets[s], {64, 256, 2048});
  }
  benchmark::Initialize(&argc, argv);
  if (benchmark::ReportUnrecognizedArguments(argc, argv)) return 2;
  benchmark::RunSpecifiedBenchmarks();
  benchmark::Shutdown();
  return 0;
}
