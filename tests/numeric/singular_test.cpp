// Exactly singular matrices of integers: zeros must be found or bracketed, and solves must refuse.
#include <gtest/gtest.h>

#include <cmath>

#include "numeric/rebuilt.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;

/// Laplacian of random connected graphs, one a part: degree on the diagonal, -1 for an edge.
SymmetricMatrix graph_laplacian(Random& random, Index parts, Index size, int extra_edges) {
  std::vector<Triplet> entries;
  const auto edge = [&](Index a, Index b) {
    if (a == b) return;
    entries.insert(entries.end(), {{a, a, 1}, {b, b, 1}, {std::max(a, b), std::min(a, b), -1}});
  };
  for (Index part = 0; part < parts; ++part) {
    const auto pick = [&](Index below) {
      return static_cast<Index>(random() % static_cast<unsigned>(below));
    };
    for (Index i = 1; i < size; ++i) edge(part + parts * i, part + parts * pick(i));
    for (int k = 0; k < extra_edges; ++k) edge(part + parts * pick(size), part + parts * pick(size));
  }
  return from_triplets(parts * size, entries);
}

TEST(Singular, GraphLaplaciansHaveOneDoubtfulPivotAPart) {
  Random random(141);
  for (const Index parts : {1, 2, 7}) {
    for (const Index size : {2, 9, 40, 150}) {
      const auto prepared = test::prepare(graph_laplacian(random, parts, size, size), 2);
      const Factorization f = prepared.factor(0);
      ASSERT_EQ(prepared.analysis.tree.components, parts);
      const Offset n = Offset{parts} * size;
      EXPECT_EQ(f.signs.negative + f.signs.zero + f.signs.positive, n);
      // n - parts eigenvalues are far above the bound, so they must be positive pivots; the rest may be
      // anything.
      EXPECT_GE(f.signs.positive, n - parts);
      for (const PivotSigns& part : f.component_signs) {
        EXPECT_EQ(part.negative + part.zero + part.positive, size);
        EXPECT_GE(part.positive, size - 1);
      }
      // Moved off zero by more than the bound both ways, every part must change exactly one sign.
      const double offset = std::max(4 * f.error_bound, 1e-12);
      EXPECT_EQ(prepared.factor(offset).signs.negative, parts);
      EXPECT_EQ(prepared.factor(-offset).signs.negative, 0);
    }
  }
}

TEST(Singular, RankOneBlocksGiveExactZeros) {
  // v v^T with powers of two: elimination in any order is exact.
  std::vector<Triplet> entries;
  constexpr Index kBlocks = 5, kSize = 90;
  for (Index block = 0; block < kBlocks; ++block) {
    for (Index i = 0; i < kSize; ++i) {
      for (Index j = 0; j <= i; ++j) {
        const double value = std::ldexp(block % 2 ? -1.0 : 1.0, (i * 7 % 5) + (j * 7 % 5) - 4);
        entries.push_back({block * kSize + i, block * kSize + j, value});
      }
    }
  }
  for (const bool scaled : {false, true}) {
    const Factorization f = test::prepare(from_triplets(kBlocks * kSize, entries), 1, scaled).factor(0);
    EXPECT_EQ(f.signs.zero, kBlocks * (kSize - 1));
    EXPECT_EQ(f.signs.positive, 3);
    EXPECT_EQ(f.signs.negative, 2);
    for (const PivotSigns& part : f.component_signs) EXPECT_EQ(part.zero, kSize - 1);
  }
}

TEST(Singular, ZeroPivotsMakeSolvesRefuse) {
  const SymmetricMatrix matrix = from_triplets(3, {{0, 0, 2}, {2, 2, -3}, {2, 0, 1}});
  FactorOptions options;
  options.keep_factor = true;
  const auto prepared = test::prepare(matrix);
  const Factorization f = prepared.factor(0, options);
  EXPECT_EQ(f.signs.zero, 1);
  std::vector<double> x{1, 2, 3};
  EXPECT_EQ(solve(*f.factor, x.data(), 1).code(), "singular");
  const std::vector<double> b{1, 2, 3};
  double backward_error = 0;
  EXPECT_EQ(solve_refined(*f.factor, prepared.shifted(0), b, x, 2, &backward_error).code(), "singular");
}

TEST(Singular, ADefiniteAttemptStopsOnAnExactZero) {
  FactorOptions options;
  options.definite = true;
  EXPECT_TRUE(test::prepare(from_triplets(2, {{0, 0, 1}, {1, 0, 2}, {1, 1, 4}})).factor(0, options).stopped);
}

TEST(Singular, RepeatedConstraintsAreZerosWithinTheBound) {
  // Twenty unknowns of stiffness 1; ten constraints x_i - x_(i+1) = 0, of which five are given twice.
  std::vector<Triplet> entries;
  for (Index i = 0; i < 20; ++i) entries.push_back({i, i, 1});
  for (Index c = 0; c < 15; ++c) {
    entries.push_back({20 + c, c % 10, 1});
    entries.push_back({20 + c, c % 10 + 1, -1});
  }
  const auto prepared = test::prepare(from_triplets(35, entries));
  FactorOptions options;
  options.keep_factor = true;
  const Factorization f = prepared.factor(0, options);
  EXPECT_LE(test::largest_row_error(prepared.shifted(0), *f.factor), f.error_bound);
  const double offset = std::max(4 * f.error_bound, 1e-12);
  EXPECT_EQ(prepared.factor(offset).signs.negative, 15);
  EXPECT_EQ(prepared.factor(-offset).signs.negative, 10);
}

}  // namespace
}  // namespace stanchion
