// Nothing, one, two and many equations that do not know each other.
#include <gtest/gtest.h>

#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using Signs = std::array<Offset, 3>;

Signs signs(const PivotSigns& s) {
  return {s.negative, s.zero, s.positive};
}

Signs factored(const SymmetricMatrix& matrix, int threads = 1) {
  return signs(test::prepare(matrix, threads).factor(0).signs);
}

TEST(Small, NoEquations) {
  for (const int threads : {1, 3}) {
    const auto prepared = test::prepare(from_triplets(0, {}), threads);
    FactorOptions options;
    options.keep_factor = true;
    const Factorization f = prepared.factor(0, options);
    EXPECT_EQ(signs(f.signs), (Signs{0, 0, 0}));
    EXPECT_EQ(f.error_bound, 0);
    EXPECT_FALSE(f.stopped || f.breakdown);
    EXPECT_TRUE(solve(*f.factor, nullptr, 1).ok());
  }
}

TEST(Small, OneEquation) {
  EXPECT_EQ(factored(from_triplets(1, {{0, 0, 3}})), (Signs{0, 0, 1}));
  EXPECT_EQ(factored(from_triplets(1, {{0, 0, -1e-200}})), (Signs{1, 0, 0}));
  EXPECT_EQ(factored(from_triplets(1, {{0, 0, 1e300}})), (Signs{0, 0, 1}));
  EXPECT_EQ(factored(from_triplets(1, {{0, 0, 0}})), (Signs{0, 1, 0}));
  EXPECT_EQ(factored(from_triplets(1, {})), (Signs{0, 1, 0}));
}

TEST(Small, TwoEquations) {
  EXPECT_EQ(factored(from_triplets(2, {{1, 0, 5}})), (Signs{1, 0, 1}));
  EXPECT_EQ(factored(from_triplets(2, {{0, 0, 2}, {1, 0, 1}, {1, 1, 2}})), (Signs{0, 0, 2}));
  EXPECT_EQ(factored(from_triplets(2, {{0, 0, 1}, {1, 0, 2}, {1, 1, 1}})), (Signs{1, 0, 1}));
  EXPECT_EQ(factored(from_triplets(2, {{0, 0, 1}, {1, 0, 2}, {1, 1, 4}})), (Signs{0, 1, 1}));
  EXPECT_EQ(factored(from_triplets(2, {{0, 0, 1e-20}, {1, 0, 1}, {1, 1, 1}})), (Signs{1, 0, 1}));
}

TEST(Small, ADiagonalMatrixIsCountedEntryByEntry) {
  test::Random random(131);
  std::vector<Triplet> entries;
  Signs expected{};
  for (Index i = 0; i < 3000; ++i) {
    const auto kind = static_cast<Index>(random() % 3);
    const double size = std::pow(10.0, test::uniform(random, -250, 250));
    entries.push_back({i, i, (kind - 1) * size});
    ++expected[static_cast<std::size_t>(kind)];
  }
  for (const int threads : {1, 2}) EXPECT_EQ(factored(from_triplets(3000, entries), threads), expected);
}

TEST(Small, TenThousandIsolatedEquationsAreAsManyParts) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < 10'000; ++i) entries.push_back({i, i, i % 4 == 0 ? -2.0 : 1.0});
  const auto prepared = test::prepare(from_triplets(10'000, entries), 2);
  EXPECT_EQ(prepared.analysis.tree.components, 10'000);
  const Factorization f = prepared.factor(0);
  EXPECT_EQ(signs(f.signs), (Signs{2500, 0, 7500}));
  for (const PivotSigns& part : f.component_signs) EXPECT_EQ(part.negative + part.positive, 1);
  FactorOptions definite;
  definite.definite = true;
  EXPECT_TRUE(prepared.factor(0, definite).stopped);
}

TEST(Small, TheOffsetShiftsEveryEigenvalue) {
  const SymmetricMatrix matrix = from_triplets(3, {{0, 0, 1}, {1, 1, 1}, {2, 2, -1}});
  const auto prepared = test::prepare(matrix, 1, false);
  EXPECT_EQ(signs(prepared.factor(2).signs), (Signs{3, 0, 0}));
  EXPECT_EQ(signs(prepared.factor(1).signs), (Signs{1, 2, 0}));
  EXPECT_EQ(signs(prepared.factor(-2).signs), (Signs{0, 0, 3}));
}

}  // namespace
}  // namespace stanchion
