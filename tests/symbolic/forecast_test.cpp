#include <gtest/gtest.h>

#include "order/brute_force.hpp"
#include "symbolic/analysis.hpp"

namespace stanchion {
namespace {

using test::Random;

TEST(Forecast, EntriesAndFlopsEqualBruteForce) {
  Random random(51);
  for (int round = 0; round < 150; ++round) {
    const SymmetricMatrix matrix = test::random_sparse(random, round % 120, 1 + round % 5, 0, 0);
    const auto analysis = analyse({&matrix, {}, true}, 1);
    ASSERT_TRUE(analysis.ok());
    const auto below = test::eliminate_symbolically(test::edges_of(matrix), analysis->tree.equation_at);
    Offset entries = 0;
    double flops = 0;
    for (const auto& rows : below) {
      const auto length = static_cast<double>(rows.size() + 1);
      entries += static_cast<Offset>(rows.size()) + 1;
      flops += length * length;
    }
    EXPECT_EQ(analysis->forecast.factor_entries, entries);
    EXPECT_EQ(analysis->forecast.factor_flops, flops);
  }
}

TEST(Forecast, FrontsAreCountedWithTheirRelaxationZeros) {
  const SymmetricMatrix box = test::laplacian(14, 13, 12);
  const auto analysis = analyse({&box, {}, true}, 2);
  ASSERT_TRUE(analysis.ok());
  const AssemblyTree& tree = analysis->tree;
  const StructureForecast& forecast = analysis->forecast;
  double flops = 0;
  Offset stored = 0, trapezoids = 0;
  Index largest = 0;
  for (Index f = 0; f < tree.fronts; ++f) {
    for (Index k = 0; k < tree.pivots(f); ++k) {
      const double rows = tree.order(f) - k;
      flops += rows * rows;
      trapezoids += tree.order(f) - k;
      stored += tree.order(f);
    }
    largest = std::max(largest, tree.order(f));
  }
  EXPECT_DOUBLE_EQ(forecast.front_flops, flops);
  EXPECT_EQ(forecast.stored_factor_entries, stored);
  EXPECT_EQ(forecast.largest_front, largest);
  EXPECT_GE(trapezoids, forecast.factor_entries);
  EXPECT_LT(static_cast<double>(trapezoids), 1.5 * static_cast<double>(forecast.factor_entries));
  EXPECT_GE(forecast.front_flops, forecast.factor_flops);
  EXPECT_GE(forecast.peak_bytes_solve - forecast.peak_bytes_count, 8 * trapezoids);
}

TEST(Forecast, ADenseMatrixIsOneFront) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < 50; ++i) {
    for (Index j = 0; j <= i; ++j) entries.push_back({i, j, i == j ? 100.0 : 1.0});
  }
  const SymmetricMatrix dense = from_triplets(50, entries);
  const auto analysis = analyse({&dense, {}, true}, 1);
  ASSERT_TRUE(analysis.ok());
  EXPECT_EQ(analysis->forecast.largest_front, 50);
  EXPECT_EQ(analysis->forecast.factor_entries, 1275);
  EXPECT_EQ(analysis->forecast.factor_flops, 50.0 * 51 * 101 / 6);
}

TEST(Forecast, OfNothingIsNothing) {
  const SymmetricMatrix nothing = from_triplets(0, {});
  const auto analysis = analyse({&nothing, {}, true}, 2);
  ASSERT_TRUE(analysis.ok());
  EXPECT_EQ(analysis->forecast.factor_entries, 0);
  EXPECT_EQ(analysis->forecast.peak_bytes_count, 0);
  EXPECT_EQ(analysis->tree.fronts, 0);
}

}  // namespace
}  // namespace stanchion
