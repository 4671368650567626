// Matrices made to break a factorization: inertia against dense eigenvalues, the bound against the factors.
#include <gtest/gtest.h>

#include "numeric/rebuilt.hpp"
#include "support/dense_reference.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;

/// Counts must agree with every eigenvalue that the proved bound can tell from zero; keeping changes nothing.
void expect_certified(const SymmetricMatrix& matrix, int threads = 1, bool scaled = true) {
  const auto prepared = test::prepare(matrix, threads, scaled);
  FactorOptions options;
  options.keep_factor = true;
  const Factorization kept = prepared.factor(0, options), dropped = prepared.factor(0);
  ASSERT_FALSE(kept.breakdown || dropped.breakdown);
  EXPECT_EQ(kept.signs.negative, dropped.signs.negative);
  EXPECT_EQ(kept.signs.zero, dropped.signs.zero);
  EXPECT_EQ(kept.error_bound, dropped.error_bound);
  EXPECT_EQ(kept.delayed_pivots, dropped.delayed_pivots);
  EXPECT_EQ(kept.two_by_two_pivots, dropped.two_by_two_pivots);
  EXPECT_LE(test::largest_row_error(prepared.shifted(0), *kept.factor), kept.error_bound);

  // Eigenvalues of the matrix that was factored.
  const auto n = static_cast<std::size_t>(matrix.rows);
  std::vector<double> full(n * n, 0.0);
  const ShiftedMatrix formed = prepared.shifted(0);
  for (Index j = 0; j < matrix.rows; ++j) {
    for (Offset k = formed.family->column_start[j]; k < formed.family->column_start[Offset{j} + 1]; ++k) {
      const Index i = formed.family->row[k];
      const double value = formed.entry(k, i, j);
      full[static_cast<std::size_t>(i) * n + static_cast<std::size_t>(j)] = value;
      full[static_cast<std::size_t>(j) * n + static_cast<std::size_t>(i)] = value;
    }
  }
  const auto values = test::eigenvalues(full, matrix.rows);
  const double margin =
      kept.error_bound + 1e-13 * std::max(std::fabs(values.front()), std::fabs(values.back()));
  EXPECT_GE(kept.signs.negative + kept.signs.zero,
            std::count_if(values.begin(), values.end(), [&](double v) { return v < -margin; }));
  EXPECT_GE(kept.signs.positive + kept.signs.zero,
            std::count_if(values.begin(), values.end(), [&](double v) { return v > margin; }));
  EXPECT_EQ(kept.signs.negative + kept.signs.zero + kept.signs.positive, matrix.rows);
}

TEST(Adversarial, WildScalingKeepsTheInertia) {
  Random random(151);
  for (int round = 0; round < 25; ++round) {
    const SymmetricMatrix tame = test::random_sparse(random, 20 + 8 * round, 4, (round % 4) * 0.2, 0);
    SCOPED_TRACE("round " + std::to_string(round));
    expect_certified(test::wildly_scaled(random, tame.clone(), 8));
    const auto before = test::eigenvalues(tame);
    const bool clear =
        std::none_of(before.begin(), before.end(), [](double v) { return std::fabs(v) < 1e-6; });
    if (!clear) continue;
    const auto negative = std::count_if(before.begin(), before.end(), [](double v) { return v < 0; });
    EXPECT_EQ(test::prepare(test::wildly_scaled(random, tame.clone(), 8)).factor(0).signs.negative, negative);
  }
}

TEST(Adversarial, UnscaledWildMatricesStillKeepTheBound) {
  Random random(152);
  for (int round = 0; round < 15; ++round) {
    SCOPED_TRACE("round " + std::to_string(round));
    const SymmetricMatrix tame = test::random_sparse(random, 30 + 10 * round, 5, 0.3, 0);
    expect_certified(test::wildly_scaled(random, tame.clone(), 4), 1, false);
  }
}

/// Dense blocks glued along a few weak entries, every second block nearly singular.
TEST(Adversarial, GluedBlocks) {
  Random random(153);
  for (const double glue : {1.0, 1e-5, 1e-10}) {
    std::vector<Triplet> entries;
    constexpr Index kBlocks = 8, kSize = 22;
    for (Index b = 0; b < kBlocks; ++b) {
      for (Index i = 0; i < kSize; ++i) {
        for (Index j = 0; j <= i; ++j) {
          // Rank one plus a little: all rows nearly equal.
          const double value = b % 2 ? 1 + 1e-8 * test::uniform(random, -1, 1) : test::uniform(random, -1, 1);
          entries.push_back({b * kSize + i, b * kSize + j, value});
        }
      }
      if (b > 0) entries.push_back({b * kSize, b * kSize - 1, glue});
    }
    SCOPED_TRACE(glue);
    expect_certified(from_triplets(kBlocks * kSize, entries));
  }
}

TEST(Adversarial, DenseRows) {
  Random random(154);
  for (const Index dense_rows : {1, 3, 9}) {
    std::vector<Triplet> entries;
    constexpr Index kRows = 230;
    for (Index i = 0; i < kRows; ++i) {
      entries.push_back({i, i, i % 5 == 0 ? 0.0 : test::uniform(random, -1, 1)});
      if (i > 0) entries.push_back({i, i - 1, test::uniform(random, -1, 1)});
      for (Index d = 0; d < dense_rows && i + 20 < kRows; ++d) {
        entries.push_back({kRows - 1 - d, i, test::uniform(random, -1, 1)});
      }
    }
    expect_certified(from_triplets(kRows, entries), 2);
  }
}

/// Weak leaves hanging on a strong core: their pivots are refused where they are first met.
TEST(Adversarial, WeakLeavesAreDelayed) {
  Random random(155);
  std::vector<Triplet> entries;
  constexpr Index kCore = 60, kLeaves = 140;
  for (Index i = 0; i < kCore; ++i) {
    for (Index j = 0; j <= i; ++j) entries.push_back({i, j, test::uniform(random, -1, 1)});
  }
  for (Index leaf = kCore; leaf < kCore + kLeaves; ++leaf) {
    entries.push_back({leaf, leaf, 1e-9});
    for (int k = 0; k < 3; ++k) entries.push_back({leaf, static_cast<Index>(random() % kCore), 1});
  }
  const SymmetricMatrix matrix = from_triplets(kCore + kLeaves, entries);
  EXPECT_GT(test::prepare(matrix, 1, false).factor(0).delayed_pivots, 0);
  expect_certified(matrix, 1, false);
  expect_certified(matrix, 1, true);
}

TEST(Adversarial, SaddlePointsWithTinyAndHugeCoupling) {
  Random random(156);
  for (const double size : {1e-9, 1.0, 1e9}) {
    SymmetricMatrix matrix = test::saddle(random, 150, 50);
    for (Index j = 0; j < 150; ++j) {
      for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
        if (matrix.row[k] >= 150) matrix.value[k] *= size;
      }
    }
    EXPECT_EQ(test::prepare(matrix).factor(0).signs.negative, 50);
    expect_certified(matrix);
  }
}

TEST(Adversarial, EveryThresholdKeepsTheBound) {
  Random random(157);
  const SymmetricMatrix matrix = test::random_sparse(random, 220, 5, 0.8, 0);
  const auto prepared = test::prepare(matrix);
  for (const double threshold : {0.5, 0.1, 1e-4, 1e-8}) {
    FactorOptions options;
    options.keep_factor = true;
    options.pivot_threshold = threshold;
    const Factorization f = prepared.factor(0, options);
    EXPECT_LE(test::largest_row_error(prepared.shifted(0), *f.factor), f.error_bound) << threshold;
  }
}

}  // namespace
}  // namespace stanchion
