#include "engine/host_rates.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>
#include <type_traits>
#include <vector>

#include "base/clock.hpp"
#include "dense/blas.hpp"
#include "dense/eliminate.hpp"
#include "inertia/relative.hpp"
#include "sparse/scaling.hpp"

namespace stanchion {
namespace {

/// First touch of memory, whoever does it: a page of 4 KiB in 0.6 us. Common practice, no source.
constexpr double kSecondsPerByteTouched = 1.5e-10;
constexpr int kRounds = 3;            ///< the fastest counts
constexpr Index kModelSide = 60;      ///< of the small model, a square net
constexpr double kSharedShare = 0.8;  ///< of all threads' speed that a front worked on by all reaches

struct FrontSize {
  Index order, pivots;
};
constexpr std::array<FrontSize, 4> kFrontSizes{{{16, 6}, {64, 24}, {256, 96}, {768, 256}}};

/// Seconds to eliminate one front, diagonally dominant, with pivoting and the fault-detecting vector.
template <class Scalar>
double front_seconds(FrontSize size, EliminationScratchOf<Scalar>& scratch) {
  const auto order = static_cast<std::size_t>(size.order), pivots = static_cast<std::size_t>(size.pivots);
  const BlockLayout layout = front_layout(size.order);
  Buffer<Scalar> entries(layout.size());
  std::vector<double> diagonal(pivots), off_diagonal(pivots);
  std::vector<Scalar> row_error(order), growth(order), sign(order, Scalar{1}), image(order),
      image_error(order);
  std::vector<PivotKind> kind(pivots);
  std::vector<Index> label(order);
  double fastest = INFINITY;
  for (int round = 0; round < kRounds; ++round) {
    std::fill(entries.begin(), entries.end(), Scalar{1} / static_cast<Scalar>(size.order));
    const BlockLowerOf<Scalar> matrix{layout, entries.data()};
    for (Index j = 0; j < size.order; ++j) *matrix.column(j, j) = 2;
    for (auto* zeros : {&row_error, &growth, &image, &image_error})
      std::fill(zeros->begin(), zeros->end(), Scalar{0});
    std::iota(label.begin(), label.end(), 0);
    const FrontOf<Scalar> front{
        matrix,           size.pivots,   {diagonal.data(), off_diagonal.data(), kind.data()}, label.data(),
        row_error.data(), growth.data(), {sign.data(), image.data(), image_error.data()}};
    const Stopwatch watch;
    eliminate_front(front, {}, scratch, nullptr);
    fastest = std::min(fastest, watch.seconds());
  }
  return fastest;
}

/// Seconds of one front of so many operations: between the two measured sizes around it the logarithms are
/// joined by a line, beyond the ends the rate of the end holds.
double eliminate_seconds(double flops, const HostRates& rates) {
  const auto& fronts = rates.fronts;
  if (flops <= fronts.front().flops) return fronts.front().seconds * flops / fronts.front().flops;
  for (std::size_t k = 1; k < fronts.size(); ++k) {
    if (flops > fronts[k].flops) continue;
    const double part =
        std::log(flops / fronts[k - 1].flops) / std::log(fronts[k].flops / fronts[k - 1].flops);
    return fronts[k - 1].seconds * std::pow(fronts[k].seconds / fronts[k - 1].seconds, part);
  }
  return fronts.back().seconds * flops / fronts.back().flops;
}

double seconds_of_front(const AssemblyTree& tree, Index front, const HostRates& rates) {
  return eliminate_seconds(front_flops(tree.order(front), tree.pivots(front)), rates) +
         rates.seconds_per_front;
}

/// A square net of springs held all around, ready to be factored.
struct SmallModel {
  ThreadPool pool{1};
  Analysis analysis;
  MatrixFamily family;
  Buffer<double> scale;
  bool usable = false;

  SmallModel() {
    std::vector<Triplet> entries;
    for (Index i = 0; i < kModelSide * kModelSide; ++i) {
      entries.push_back({i, i, 4});
      if (i % kModelSide > 0) entries.push_back({i, i - 1, -1});
      if (i >= kModelSide) entries.push_back({i, i - kModelSide, -1});
    }
    const SymmetricMatrix matrix = from_triplets(kModelSide * kModelSide, entries);
    auto made = analyse({&matrix, {}, true}, 1);
    const std::array<const SymmetricMatrix*, 1> members{&matrix};
    if (!made.ok()) return;
    analysis = std::move(*made);
    family = permute(unite(members), analysis.tree.position_of);
    auto scaling = power_of_two_scaling(family, std::array{1.0});
    if (!scaling.ok()) return;
    scale = std::move(*scaling);
    usable = true;
  }
};

/// What a small model shows: the time of a factorization beyond its eliminations, and the relative test.
void measure_small_model(HostRates& rates, bool single) {
  SmallModel model;
  if (!model.usable) return;
  const AssemblyTree& tree = model.analysis.tree;
  const ShiftedMatrix matrix{&model.family, {1.0}, &model.scale, 0};
  double elimination = 0;
  for (Index f = 0; f < tree.fronts; ++f) elimination += seconds_of_front(tree, f, rates);
  double factoring = INFINITY, testing = INFINITY;
  for (int round = 0; round < kRounds; ++round) {
    FactorOptions options;
    options.keep_factor = round == 0;
    options.single = single;
    const auto factorization = factorize(model.analysis, matrix, options, model.pool);
    if (!factorization.ok() || factorization->breakdown) return;
    factoring = std::min(factoring, factorization->seconds);
    if (round > 0) continue;
    for (int again = 0; again < kRounds; ++again) {
      RiskBudget risk(1e-6);
      const auto test = certify_relative(model.analysis, matrix, *factorization, risk, 1, model.pool);
      if (test.ok()) testing = std::min(testing, test->seconds);
    }
  }
  rates.seconds_per_front = std::max(0.0, factoring - elimination) / std::max<Index>(1, tree.fronts);
  const double tested = static_cast<double>(model.analysis.forecast.stored_factor_entries) +
                        kTestedEntriesPerDatum * static_cast<double>(model.family.entries());
  if (std::isfinite(testing)) rates.seconds_per_tested_entry = testing / tested;
}

template <class Scalar>
HostRates measure() {
  HostRates rates;
  EliminationScratchOf<Scalar> scratch;
  for (std::size_t k = 0; k < kFrontSizes.size(); ++k) {
    const FrontSize size = kFrontSizes[k];
    rates.fronts[k] = {front_flops(size.order, size.pivots), std::max(front_seconds(size, scratch), 1e-9)};
  }
  measure_small_model(rates, std::is_same_v<Scalar, float>);
  return rates;
}

}  // namespace

HostRates measure_host(bool single) {
  use_single_threaded_blas();
  return single ? measure<float>() : measure<double>();
}

double factorization_seconds(const Analysis& analysis, const HostRates& rates, int workers) {
  const AssemblyTree& tree = analysis.tree;
  double all = 0, shared = 0;
  for (Index f = 0; f < tree.fronts; ++f) all += seconds_of_front(tree, f, rates);
  for (const Index f : analysis.schedule.shared_fronts) shared += seconds_of_front(tree, f, rates);
  const double touching = kSecondsPerByteTouched * static_cast<double>(peak_bytes(analysis, workers).count);
  return touching + (all - shared) / workers + shared / std::max(1.0, kSharedShare * workers);
}

double relative_test_seconds(const Analysis& analysis, Offset entries, const HostRates& rates, int workers) {
  const double tested = static_cast<double>(analysis.forecast.stored_factor_entries) +
                        kTestedEntriesPerDatum * static_cast<double>(entries);
  return rates.seconds_per_tested_entry * tested / workers;
}

}  // namespace stanchion
