#include "symbolic/schedule.hpp"

#include <gtest/gtest.h>

#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::laplacian;
using test::Random;

/// Subtrees are disjoint runs, and with the shared fronts they are everything, children before parents.
void expect_complete(const AssemblyTree& tree, const Schedule& schedule) {
  std::vector<int> covered(static_cast<std::size_t>(tree.fronts), 0);
  std::vector<char> shared(static_cast<std::size_t>(tree.fronts), 0);
  Index last = -1;
  for (const Index f : schedule.shared_fronts) {
    EXPECT_GT(f, last);
    last = f;
    ++covered[static_cast<std::size_t>(f)];
    shared[static_cast<std::size_t>(f)] = 1;
  }
  Index end = 0;
  for (const Subtree& subtree : schedule.subtrees) {
    EXPECT_GE(subtree.first, end) << "subtrees are disjoint and ascend";
    ASSERT_LT(subtree.first, subtree.end);
    end = subtree.end;
    double flops = 0;
    for (Index f = subtree.first; f < subtree.end; ++f) {
      ++covered[static_cast<std::size_t>(f)];
      flops += front_flops(tree.order(f), tree.pivots(f));
      const Index up = tree.parent[f];
      if (f + 1 < subtree.end) {
        EXPECT_TRUE(up > f && up < subtree.end) << "a subtree is closed below its root";
      } else {
        EXPECT_TRUE(up < 0 || shared[static_cast<std::size_t>(up)]);
      }
    }
    EXPECT_NEAR(subtree.flops, flops, 1e-9 * flops);
  }
  for (const int times : covered) EXPECT_EQ(times, 1);
  for (const Index f : schedule.shared_fronts) {
    const Index up = tree.parent[f];
    EXPECT_TRUE(up < 0 || shared[static_cast<std::size_t>(up)]) << "above a shared front all are shared";
  }
}

TEST(FrontFlops, SumsTheSquaresOfTheColumns) {
  for (const auto& [order, pivots] : {std::pair{1, 1}, {5, 2}, {100, 100}, {700, 31}, {3, 0}}) {
    double expected = 0;
    for (int k = 0; k < pivots; ++k) expected += static_cast<double>(order - k) * (order - k);
    EXPECT_EQ(front_flops(order, pivots), expected);
  }
}

TEST(Schedule, IsCompleteForAnyNumberOfWorkers) {
  Random random(41);
  for (int round = 0; round < 40; ++round) {
    const SymmetricMatrix matrix =
        round % 2 ? laplacian(4 + round / 2, 13, 12) : test::random_sparse(random, 40 * round, 3, 0.1, 0);
    for (const int workers : {1, 2, 3, 16}) {
      const auto analysis = analyse({&matrix, {}, true}, workers);
      ASSERT_TRUE(analysis.ok());
      EXPECT_EQ(analysis->schedule.workers, workers);
      expect_complete(analysis->tree, analysis->schedule);
      EXPECT_TRUE(workers > 1 || analysis->schedule.shared_fronts.empty());
    }
  }
}

TEST(Schedule, TheTreeDoesNotDependOnTheWorkers) {
  const SymmetricMatrix matrix = laplacian(28, 27, 26);
  std::vector<Index> pairs(static_cast<std::size_t>(matrix.rows));
  for (std::size_t i = 0; i < pairs.size(); ++i) pairs[i] = static_cast<Index>(i / 2);
  const auto same = [](const auto& a, const auto& b) {
    return std::equal(a.begin(), a.end(), b.begin(), b.end());
  };
  for (const auto& nodes : {std::vector<Index>{}, pairs}) {
    const auto one = analyse({&matrix, nodes, true}, 1), four = analyse({&matrix, nodes, true}, 4);
    ASSERT_TRUE(one.ok() && four.ok());
    EXPECT_FALSE(four->schedule.shared_fronts.empty());
    EXPECT_GT(one->tree.fronts, 1'000) << "so many that several threads list their rows";
    EXPECT_TRUE(same(one->tree.position_of, four->tree.position_of));
    EXPECT_TRUE(same(one->tree.parent, four->tree.parent));
    EXPECT_TRUE(same(one->tree.first_column, four->tree.first_column));
    EXPECT_TRUE(same(one->tree.row_start, four->tree.row_start));
    EXPECT_TRUE(same(one->tree.rows_below, four->tree.rows_below));
  }
}

TEST(Schedule, NoSubtreeHoldsMostOfTheWorkWhenThereAreWorkersToShareIt) {
  const SymmetricMatrix matrix = laplacian(24, 23, 22);
  const auto analysis = analyse({&matrix, {}, true}, 3);
  ASSERT_TRUE(analysis.ok());
  double total = 0, largest = 0;
  for (Index f = 0; f < analysis->tree.fronts; ++f) {
    total += front_flops(analysis->tree.order(f), analysis->tree.pivots(f));
  }
  for (const Subtree& subtree : analysis->schedule.subtrees) largest = std::max(largest, subtree.flops);
  EXPECT_LT(largest, total / 3);
}

/// Nothing is delayed in a definite matrix: the forecast must then hold.
TEST(Schedule, PeakIsAnUpperBoundOfWhatAFactorizationUses) {
  for (const auto& [nx, ny, nz] : {std::array<Index, 3>{28, 27, 26}, {90, 80, 1}, {3000, 1, 1}, {7, 6, 5}}) {
    for (const int threads : {1, 2, 3}) {
      const auto prepared = test::prepare(laplacian(nx, ny, nz), threads);
      const StructureForecast& forecast = prepared.analysis.forecast;
      SCOPED_TRACE(std::to_string(nx * ny * nz) + " rows, threads " + std::to_string(threads));
      FactorOptions options;
      const Factorization counted = prepared.factor(0, options);
      EXPECT_EQ(counted.delayed_pivots, 0);
      EXPECT_LE(counted.peak_bytes, forecast.peak_bytes_count);
      options.keep_factor = true;
      EXPECT_LE(prepared.factor(0, options).peak_bytes, forecast.peak_bytes_solve);
    }
  }
}

TEST(Schedule, PeakOfOneWorkerIsTight) {
  const auto prepared = test::prepare(laplacian(22, 21, 20), 1);
  const auto bound = static_cast<double>(prepared.analysis.forecast.peak_bytes_count);
  EXPECT_GT(static_cast<double>(prepared.factor(0).peak_bytes), 0.8 * bound);
}

}  // namespace
}  // namespace stanchion
