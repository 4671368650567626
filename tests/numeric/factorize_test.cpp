#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "sparse/product.hpp"
#include "support/dense_reference.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::laplacian;
using test::prepare;
using test::Random;

std::array<Offset, 3> signs(const Factorization& f) {
  return {f.signs.negative, f.signs.zero, f.signs.positive};
}

/// Inertia by dense eigenvalues of the scaled, shifted matrix; fails when one is too close to zero to tell.
std::array<Offset, 3> dense_signs(const SymmetricMatrix& matrix) {
  std::array<Offset, 3> count{};
  const auto values = test::eigenvalues(matrix);
  const double largest = std::max(std::fabs(values.front()), std::fabs(values.back()));
  for (const double v : values) {
    EXPECT_GT(std::fabs(v), 1e-13 * largest) << "the test matrix is too close to singular";
    ++count[v < 0 ? 0 : 2];
  }
  return count;
}

/// ||P A P^T - L D L^T||_2 <= sqrt(row sum bound): rebuilt densely from the kept factor.
double dense_backward_error(const test::Prepared& prepared, const Factorization& f) {
  const Index n = prepared.family.rows;
  const auto nn = static_cast<std::size_t>(n);
  std::vector<long double> rebuilt(nn * nn, 0.0L);
  for (const FactorFront& front : f.factor->fronts) {
    for (Index k = 0; k < front.pivots; ++k) {
      for (Index l = k; l < std::min(front.pivots, k + 2); ++l) {
        if (l > k && front.kind[k] != PivotKind::kTwoFirst) continue;
        const long double d = l == k ? front.diagonal[k] : front.off_diagonal[k];
        for (Index i = 0; i < front.order; ++i) {
          for (Index j = 0; j < front.order; ++j) {
            const long double a = front.lower[Offset{k} * front.order + i],
                              b = front.lower[Offset{l} * front.order + j];
            const auto at = static_cast<std::size_t>(front.position[i]) +
                            static_cast<std::size_t>(front.position[j]) * nn;
            rebuilt[at] += a * d * b;
            if (l > k)
              rebuilt[static_cast<std::size_t>(front.position[j]) +
                      static_cast<std::size_t>(front.position[i]) * nn] += a * d * b;
          }
        }
      }
    }
  }
  const ShiftedMatrix matrix = prepared.shifted(0);
  std::vector<double> error(nn * nn);
  for (std::size_t i = 0; i < nn * nn; ++i) error[i] = static_cast<double>(-rebuilt[i]);
  for (Index j = 0; j < n; ++j) {
    for (Offset k = prepared.family.column_start[j]; k < prepared.family.column_start[Offset{j} + 1]; ++k) {
      const auto i = static_cast<std::size_t>(prepared.family.row[k]), jj = static_cast<std::size_t>(j);
      const double value = matrix.entry(k, prepared.family.row[k], j);
      const auto exact = static_cast<double>(static_cast<long double>(value) - rebuilt[i + jj * nn]);
      error[i + jj * nn] = error[jj + i * nn] = exact;
    }
  }
  const auto values = test::eigenvalues(error, n);
  return std::max(std::fabs(values.front()), std::fabs(values.back()));
}

TEST(Factorize, LaplacianCountsMatchTheClosedFormAtManyShifts) {
  const auto spectrum = test::laplacian_spectrum(9, 8, 7);
  for (const double shift : {0.0, 0.31, 1.7, 2.9, 5.01, 7.3, 11.9, 12.5}) {
    const auto prepared = prepare(laplacian(9, 8, 7, shift));
    const auto f = prepared.factor(0);
    const auto below = std::count_if(spectrum.begin(), spectrum.end(), [&](double v) { return v < shift; });
    EXPECT_EQ(signs(f), (std::array<Offset, 3>{below, 0, Offset{504} - below})) << "shift " << shift;
    EXPECT_LT(f.error_bound, 1e-7);
  }
}

TEST(Factorize, RandomMatricesMatchDenseEigenvaluesAndTheBoundHolds) {
  Random random(7);
  for (int round = 0; round < 40; ++round) {
    const auto n = static_cast<Index>(5 + round * 6);
    const double zero = round % 4 == 0 ? 0.9 : (round % 4) * 0.1;
    const SymmetricMatrix matrix = test::random_sparse(random, n, 4, zero, round % 3);
    const auto prepared = prepare(matrix, 1, false);
    FactorOptions options;
    options.keep_factor = true;
    const auto f = prepared.factor(0, options);
    ASSERT_FALSE(f.breakdown);
    const auto discarded = prepared.factor(0);
    EXPECT_EQ(signs(discarded), signs(f));
    EXPECT_EQ(discarded.error_bound, f.error_bound);
    const double actual = dense_backward_error(prepared, f);
    EXPECT_LE(actual, f.error_bound + 1e-17) << "n " << n;
    const auto values = test::eigenvalues(matrix);
    const double margin =
        f.error_bound + 1e-13 * std::max(std::fabs(values.front()), std::fabs(values.back()));
    const auto surely_negative =
        std::count_if(values.begin(), values.end(), [&](double v) { return v < -margin; });
    const auto surely_positive =
        std::count_if(values.begin(), values.end(), [&](double v) { return v > margin; });
    EXPECT_GE(f.signs.negative + f.signs.zero, surely_negative);
    EXPECT_GE(f.signs.positive + f.signs.zero, surely_positive);
    EXPECT_EQ(f.signs.negative + f.signs.zero + f.signs.positive, n);
  }
}

TEST(Factorize, SaddlePointsComeOutRight) {
  Random random(11);
  const SymmetricMatrix matrix = test::saddle(random, 220, 60);
  const auto f = prepare(matrix).factor(0);
  EXPECT_EQ(signs(f), dense_signs(matrix));
  EXPECT_EQ(signs(f), (std::array<Offset, 3>{60, 0, 220}));
}

TEST(Factorize, AllZeroDiagonalIsCountedExactly) {
  // Shifted by its diagonal the Laplacian has a zero diagonal and a spectrum symmetric about zero.
  const SymmetricMatrix matrix = laplacian(7, 8, 10, 6);
  const auto f = prepare(matrix).factor(0);
  const auto spectrum = test::laplacian_spectrum(7, 8, 10);
  Offset below = 0, at = 0;
  for (const double v : spectrum) {
    below += v < 6 - 1e-9;
    at += std::fabs(v - 6) <= 1e-9;
  }
  EXPECT_EQ(at, 0);
  EXPECT_EQ(f.signs.negative, below);
  EXPECT_GT(f.two_by_two_pivots, 0);
}

TEST(Factorize, ExactlySingularMatricesGiveZeroPivots) {
  const SymmetricMatrix empty_rows = from_triplets(4, {{0, 0, 2}, {2, 2, -3}});
  const auto f = prepare(empty_rows).factor(0);
  EXPECT_EQ(signs(f), (std::array<Offset, 3>{1, 2, 1}));
}

TEST(Factorize, DefiniteAttemptStopsAtTheFirstBadPivot) {
  FactorOptions options;
  options.definite = true;
  EXPECT_FALSE(prepare(laplacian(6, 6, 6)).factor(0, options).stopped);
  EXPECT_TRUE(prepare(laplacian(6, 6, 6, 0.7)).factor(0, options).stopped);
}

TEST(Factorize, SameBitsForAnyNumberOfThreads) {
  for (const double shift : {0.0, 2.03}) {
    const SymmetricMatrix matrix = laplacian(28, 27, 26, shift);
    const auto one = prepare(matrix, 1).factor(0);
    for (const int threads : {2, 3, 5}) {
      const auto prepared = prepare(matrix, threads);
      EXPECT_FALSE(prepared.analysis.schedule.shared_fronts.empty());
      const auto many = prepared.factor(0);
      EXPECT_EQ(signs(many), signs(one));
      EXPECT_EQ(many.error_bound, one.error_bound);  // to the last bit
      EXPECT_EQ(many.delayed_pivots, one.delayed_pivots);
    }
  }
}

TEST(Factorize, SolvesToWorkingPrecisionWithOneRefinement) {
  Random random(3);
  for (const bool indefinite : {false, true}) {
    const SymmetricMatrix matrix = indefinite ? test::saddle(random, 300, 80) : laplacian(12, 11, 10);
    const auto prepared = prepare(matrix, 2);
    FactorOptions options;
    options.keep_factor = true;
    const auto f = prepared.factor(0, options);
    const auto n = static_cast<std::size_t>(matrix.rows);
    std::vector<double> truth(n), b(n), x(n);
    for (double& v : truth) v = test::uniform(random, -1, 1);
    multiply(prepared.shifted(0), truth, b);
    double backward_error = 1;
    ASSERT_TRUE(solve_refined(*f.factor, prepared.shifted(0), b, x, 3, &backward_error).ok());
    EXPECT_LT(backward_error, 4e-16);
    for (std::size_t i = 0; i < n; ++i) EXPECT_NEAR(x[i], truth[i], 1e-8);
  }
}

TEST(Factorize, MemoryCapIsMetAtRunTime) {
  const auto prepared = prepare(laplacian(16, 16, 16));
  FactorOptions options;
  options.memory_cap_bytes = 100'000;
  const auto result = factorize(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  ASSERT_FALSE(result.ok());
  EXPECT_EQ(result.status().kind(), StatusKind::kResourceLimit);
  EXPECT_EQ(result.status().code(), "memory-cap");
}

TEST(Factorize, CancellationIsNotAnAnswer) {
  const auto prepared = prepare(laplacian(10, 10, 10));
  CancellationToken token;
  token.cancel();
  FactorOptions options;
  options.cancel = &token;
  const auto result = factorize(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  ASSERT_FALSE(result.ok());
  EXPECT_EQ(result.status().kind(), StatusKind::kInterrupted);
}

}  // namespace
}  // namespace stanchion
