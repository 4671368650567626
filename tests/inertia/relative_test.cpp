#include "inertia/relative.hpp"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "support/dense_reference.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::laplacian;
using test::prepare;
using test::Random;

RelativeResult relative(const test::Prepared& prepared, double risk = 1e-6, std::uint64_t seed = 1) {
  FactorOptions options;
  options.keep_factor = true;
  const Factorization f = prepared.factor(0, options);
  RiskBudget budget(risk);
  auto result = certify_relative(prepared.analysis, prepared.shifted(0), f, budget, seed, *prepared.pool);
  EXPECT_TRUE(result.ok());
  EXPECT_GT(budget.spent(), 0) << "an attempt is charged whatever comes of it";
  return *result;
}

/// A chain of springs with `links` links of stiffness `weak` and the rest 1, held at one end: definite, and
/// its smallest eigenvalue is about weak / n.
SymmetricMatrix chain(Index n, double weak) {
  std::vector<Triplet> entries{{0, 0, 1}};
  for (Index i = 1; i < n; ++i) {
    const double k = i == n / 2 ? weak : 1;
    entries.insert(entries.end(), {{i, i, k}, {i - 1, i - 1, k}, {i, i - 1, -k}});
  }
  return from_triplets(n, entries);
}

TEST(Relative, CertifiesDefiniteAndIndefiniteLaplacians) {
  const auto spectrum = test::laplacian_spectrum(11, 12, 13);
  for (const double shift : {0.0, 0.5, 3.3, 6.02}) {
    const auto result = relative(prepare(laplacian(11, 12, 13, shift), 2));
    const auto below = std::count_if(spectrum.begin(), spectrum.end(), [&](double v) { return v < shift; });
    EXPECT_TRUE(result.certified) << shift << " bound " << result.relative_bound;
    EXPECT_LT(result.relative_bound, 0.01);
    EXPECT_EQ(result.negative, below);
  }
}

TEST(Relative, CertifiesWhatOffsetsCannot) {
  // Mechanisms held by springs of 1e-9 and couplings of 1e12: a small eigenvalue beside large ones.
  const auto held = relative(prepare(chain(300, 1e-9)));
  EXPECT_TRUE(held.certified) << held.relative_bound;
  EXPECT_EQ(held.negative, 0);
  const auto coupled = relative(prepare(chain(300, 1e12)));
  EXPECT_TRUE(coupled.certified) << coupled.relative_bound;
  EXPECT_EQ(coupled.negative, 0);
}

TEST(Relative, TellsASpringJustBeyondCritical) {
  // 2x2 [1 b; b 1]: critical at b = 1, closed form.
  for (const double excess : {-1e-6, 1e-6}) {
    const auto result = relative(prepare(from_triplets(2, {{0, 0, 1}, {1, 1, 1}, {1, 0, 1 + excess}})));
    EXPECT_TRUE(result.certified) << result.relative_bound;
    EXPECT_EQ(result.negative, excess > 0 ? 1 : 0);
  }
}

TEST(Relative, NeverCertifiesASingularMatrix) {
  // Integer matrices: a free chain (nullity 1) and Laplacians at closed-form eigenvalues that are integers.
  std::vector<Triplet> entries;
  for (Index i = 1; i < 400; ++i)
    entries.insert(entries.end(), {{i, i, 3}, {i - 1, i - 1, 3}, {i, i - 1, -3}});
  const SymmetricMatrix free_chain = from_triplets(400, entries);
  for (std::uint64_t seed = 1; seed <= 50; ++seed) {
    EXPECT_FALSE(relative(prepare(free_chain), 1e-6, seed).certified) << seed;
    EXPECT_FALSE(relative(prepare(laplacian(8, 8, 8, 6)), 1e-6, seed).certified) << seed;
  }
}

TEST(Relative, SameBitsForAnyNumberOfThreads) {
  const SymmetricMatrix matrix = laplacian(24, 23, 22, 1.7);
  const auto one = relative(prepare(matrix, 1));
  for (const int threads : {2, 3})
    EXPECT_EQ(relative(prepare(matrix, threads)).relative_bound, one.relative_bound);
}

TEST(Relative, ReportedBoundIsAboveTheTrueNorm) {
  Random random(5);
  for (int round = 0; round < 20; ++round) {
    const SymmetricMatrix matrix = test::random_sparse(random, 40, 4, 0.2, round % 3);
    const auto prepared = prepare(matrix);
    const auto result = relative(prepared);
    const auto values = test::eigenvalues(matrix);
    if (!result.certified) continue;
    const auto negative = std::count_if(values.begin(), values.end(), [](double v) { return v < 0; });
    EXPECT_EQ(result.negative, negative);
  }
}

}  // namespace
}  // namespace stanchion
