// One benchmark a kernel, of the same name, for every instruction set this processor runs. Rates count
// multiply-adds as two operations and every number read or written once.
#include <benchmark/benchmark.h>

#include <random>
#include <string>
#include <vector>

#include "dense/kernels.hpp"

namespace stanchion {
namespace {

template <class Scalar>
std::vector<Scalar> random_values(std::size_t count) {
  std::mt19937_64 random(1);
  std::uniform_real_distribution<double> distribution(-1, 1);
  std::vector<Scalar> values(count);
  for (Scalar& v : values) v = static_cast<Scalar>(distribution(random));
  return values;
}

/// A tile and its pivots; restored before every run.
template <class Scalar>
struct TileBench {
  Index width;
  std::vector<Scalar> original, tile;
  std::vector<double> diagonal, off_diagonal;
  std::vector<PivotKind> kind;
  std::vector<Index> permutation;

  explicit TileBench(Index width_in, double shift) : width(width_in) {
    const auto w = static_cast<std::size_t>(width);
    original = random_values<Scalar>(w * kTileWidth);
    for (Index i = 0; i < width; ++i)
      original[static_cast<std::size_t>(i * kTileWidth + i)] += static_cast<Scalar>(shift);
    tile = original;
    diagonal.resize(w), off_diagonal.resize(w), kind.resize(w, PivotKind::kOne), permutation.resize(w);
  }
  PivotArrays pivots() { return {diagonal.data(), off_diagonal.data(), kind.data()}; }
};

void set_flops(benchmark::State& state, double flops) {
  state.counters["FLOPS"] = benchmark::Counter(flops, benchmark::Counter::kIsIterationInvariantRate,
                                               benchmark::Counter::OneK::kIs1000);
}

template <class Scalar>
void set_bytes(benchmark::State& state, Offset numbers) {
  state.SetBytesProcessed(state.iterations() * numbers * static_cast<Offset>(sizeof(Scalar)));
}

template <class Scalar>
void factor_tile(benchmark::State& state, const KernelSet<Scalar>& set) {
  TileBench<Scalar> bench(static_cast<Index>(state.range(0)), 70);
  for (auto _ : state) {
    bench.tile = bench.original;
    benchmark::DoNotOptimize(
        set.factor_tile(bench.tile.data(), kTileWidth, bench.width, false, 100, bench.pivots()));
  }
  const double w = bench.width;
  set_flops(state, w * w * w / 3);
}

template <class Scalar>
void factor_tile_pivoted(benchmark::State& state, const KernelSet<Scalar>& set) {
  TileBench<Scalar> bench(static_cast<Index>(state.range(0)), 0);
  for (auto _ : state) {
    bench.tile = bench.original;
    benchmark::DoNotOptimize(set.factor_tile_pivoted(bench.tile.data(), kTileWidth, bench.width,
                                                     bench.pivots(), bench.permutation.data()));
  }
  const double w = bench.width;
  set_flops(state, w * w * w / 3);
}

template <class Scalar>
void invert_unit_lower(benchmark::State& state, const KernelSet<Scalar>& set) {
  TileBench<Scalar> bench(static_cast<Index>(state.range(0)), 0);
  std::vector<Scalar> inverse(bench.original.size());
  for (auto& v : bench.original) v /= 64;
  for (auto _ : state) {
    set.invert_unit_lower(bench.original.data(), kTileWidth, bench.width, inverse.data(), kTileWidth);
    benchmark::DoNotOptimize(inverse.data());
    benchmark::ClobberMemory();
  }
  const double w = bench.width;
  set_flops(state, w * w * w / 3);
}

/// Packed random operands of some rows and columns, of any set.
template <class Scalar>
struct StripsBench {
  Index left_stride, right_stride;
  std::vector<Scalar> left, right;

  StripsBench(const KernelSet<Scalar>& set, Index rows, Index columns)
      : left_stride(set.row_strip * columns),
        right_stride(set.column_strip * columns),
        left(random_values<Scalar>(static_cast<std::size_t>(rows + most_row_strip<Scalar>()) *
                                   static_cast<std::size_t>(columns))),
        right(left) {}
};

template <class Scalar>
void subtract_product(benchmark::State& state, const KernelSet<Scalar>& set) {
  const auto depth = static_cast<Index>(state.range(0));
  constexpr Index kRows = 192;
  const StripsBench<Scalar> bench(set, kRows, depth);
  std::vector<Scalar> c(std::size_t{kRows} * kRows);
  for (auto _ : state) {
    set.subtract_product(bench.left.data(), bench.left_stride, bench.right.data(), bench.right_stride, depth,
                         kRows, kRows, kRows, 0, c.data(), kRows);
    benchmark::DoNotOptimize(c.data());
    benchmark::ClobberMemory();
  }
  set_flops(state, 2.0 * kRows * kRows * depth);
}

template <class Scalar>
void multiply_by_upper(benchmark::State& state, const KernelSet<Scalar>& set) {
  const auto rows = static_cast<Index>(state.range(0));
  StripsBench<Scalar> bench(set, rows, kTileWidth);
  const auto a = random_values<Scalar>(static_cast<std::size_t>(rows) * kTileWidth);
  const std::vector<Scalar> factor(std::size_t{kTileWidth} * kTileWidth, Scalar{0.5});
  for (auto _ : state) {
    set.multiply_by_upper(a.data(), rows, rows, factor.data(), kTileWidth, bench.right.data(),
                          bench.right_stride);
    benchmark::DoNotOptimize(bench.right.data());
    benchmark::ClobberMemory();
  }
  set_flops(state, static_cast<double>(rows) * kTileWidth * (kTileWidth + 1));
}

template <class Scalar>
void strips_abs_max(benchmark::State& state, const KernelSet<Scalar>& set) {
  const auto rows = static_cast<Index>(state.range(0));
  const StripsBench<Scalar> bench(set, rows, kTileWidth);
  std::vector<Scalar> out(kTileWidth);
  for (auto _ : state) {
    set.strips_abs_max(bench.right.data(), bench.right_stride, rows, kTileWidth, out.data());
    benchmark::DoNotOptimize(out.data());
    benchmark::ClobberMemory();
  }
  set_bytes<Scalar>(state, Offset{rows} * kTileWidth);
}

template <class Scalar>
void divide_strips(benchmark::State& state, const KernelSet<Scalar>& set) {
  const auto rows = static_cast<Index>(state.range(0));
  TileBench<Scalar> tile(kTileWidth, 0);
  StripsBench<Scalar> bench(set, rows, kTileWidth);
  std::vector<Scalar> sign(static_cast<std::size_t>(rows), Scalar{1}), sum(kTileWidth),
      signed_sum(kTileWidth);
  for (auto& d : tile.diagonal) d = 0.5;
  for (auto _ : state) {
    set.divide_strips(bench.right.data(), bench.right_stride, rows, kTileWidth, tile.pivots(), sign.data(),
                      bench.left.data(), bench.left_stride, nullptr, 0, sum.data(), signed_sum.data());
    benchmark::DoNotOptimize(bench.left.data());
    benchmark::ClobberMemory();
  }
  set_bytes<Scalar>(state, Offset{2} * rows * kTileWidth);
}

template <class Scalar>
void strips_growth_and_image(benchmark::State& state, const KernelSet<Scalar>& set) {
  const auto rows = static_cast<Index>(state.range(0));
  const StripsBench<Scalar> bench(set, rows, kTileWidth);
  const std::vector<Scalar> weight(kTileWidth, Scalar{1e-16F});
  std::vector<Scalar> growth(static_cast<std::size_t>(rows)), image(growth);
  for (auto _ : state) {
    set.strips_growth_and_image(bench.left.data(), bench.left_stride, rows, kTileWidth, weight.data(),
                                weight.data(), growth.data(), image.data());
    benchmark::DoNotOptimize(growth.data());
    benchmark::ClobberMemory();
  }
  set_bytes<Scalar>(state, Offset{rows} * kTileWidth);
}

template <class Scalar>
void weighted_abs_sums(benchmark::State& state, const KernelSet<Scalar>& set) {
  const auto rows = static_cast<Index>(state.range(0));
  const auto a = random_values<Scalar>(static_cast<std::size_t>(rows) * kTileWidth);
  std::vector<Scalar> weight(kTileWidth, Scalar{1e-16F}), row_sum(static_cast<std::size_t>(rows)),
      column_sum(kTileWidth);
  for (auto _ : state) {
    set.weighted_abs_sums(a.data(), rows, rows, kTileWidth, weight.data(), row_sum.data(), column_sum.data());
    benchmark::DoNotOptimize(row_sum.data());
    benchmark::ClobberMemory();
  }
  set_bytes<Scalar>(state, Offset{rows} * kTileWidth);
}

template <class Scalar>
void copy_with_abs_sums(benchmark::State& state, const KernelSet<Scalar>& set) {
  const auto rows = static_cast<Index>(state.range(0));
  const auto source = random_values<Scalar>(static_cast<std::size_t>(rows));
  std::vector<Scalar> destination(source.size()), row_sum(source.size());
  for (auto _ : state) {
    benchmark::DoNotOptimize(set.copy_with_abs_sums(source.data(), rows, destination.data(), row_sum.data()));
    benchmark::ClobberMemory();
  }
  set_bytes<Scalar>(state, Offset{4} * rows);
}

template <class Scalar>
using Body = void (*)(benchmark::State&, const KernelSet<Scalar>&);

template <class Scalar>
void add(const char* name, Body<Scalar> body, const KernelSet<Scalar>& set,
         std::initializer_list<Index> sizes) {
  const std::string title =
      std::string(name) + "/" + set.isa + (sizeof(Scalar) == sizeof(float) ? "/single" : "");
  for (const Index size : sizes) {
    benchmark::RegisterBenchmark(title.c_str(), [body, &set](benchmark::State& state) {
      body(state, set);
    })->Arg(size);
  }
}

template <class Scalar>
void add_all() {
  const KernelSet<Scalar>* sets[3];
  const int count = kernel_sets(sets);
  for (int s = 0; s < count; ++s) {
    add<Scalar>("factor_tile", factor_tile, *sets[s], {8, 16, 32, 64});
    add<Scalar>("factor_tile_pivoted", factor_tile_pivoted, *sets[s], {8, 16, 32, 64});
    add<Scalar>("invert_unit_lower", invert_unit_lower, *sets[s], {8, 16, 32, 64});
    add<Scalar>("subtract_product", subtract_product, *sets[s], {8, 16, 32, 64, 192});
    add<Scalar>("multiply_by_upper", multiply_by_upper, *sets[s], {64, 192, 2048});
    add<Scalar>("strips_abs_max", strips_abs_max, *sets[s], {64, 192, 2048});
    add<Scalar>("divide_strips", divide_strips, *sets[s], {64, 192, 2048});
    add<Scalar>("strips_growth_and_image", strips_growth_and_image, *sets[s], {64, 192, 2048});
    add<Scalar>("weighted_abs_sums", weighted_abs_sums, *sets[s], {64, 256, 2048});
    add<Scalar>("copy_with_abs_sums", copy_with_abs_sums, *sets[s], {64, 256, 2048});
  }
}

}  // namespace
}  // namespace stanchion

int main(int argc, char** argv) {
  using namespace stanchion;
  add_all<double>();
  add_all<float>();
  benchmark::Initialize(&argc, argv);
  if (benchmark::ReportUnrecognizedArguments(argc, argv)) return 2;
  benchmark::RunSpecifiedBenchmarks();
  benchmark::Shutdown();
  return 0;
}
