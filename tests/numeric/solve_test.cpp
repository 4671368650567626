// Solves with several right-hand sides against dense LAPACK.
#include <gtest/gtest.h>

#include "support/dense_reference.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

extern "C" void dsysv_(const char* uplo, const int* n, const int* nrhs, double* a, const int* lda, int* ipiv,
                       double* b, const int* ldb, double* work, const int* lwork, int* info);

namespace stanchion {
namespace {

using test::Random;

/// X with A X = B by LAPACK.
std::vector<double> dense_solve(const SymmetricMatrix& matrix, std::vector<double> b, int columns) {
  const int n = matrix.rows, lwork = 64 * std::max(1, n);
  std::vector<double> full = test::to_dense(matrix), work(static_cast<std::size_t>(lwork));
  std::vector<int> pivots(static_cast<std::size_t>(n));
  int info = -1;
  dsysv_("L", &n, &columns, full.data(), &n, pivots.data(), b.data(), &n, work.data(), &lwork, &info);
  EXPECT_EQ(info, 0);
  return b;
}

/// Largest difference of both solutions over the largest entry; unscaled, so that A is the matrix itself.
double difference(const SymmetricMatrix& matrix, Index columns, int threads) {
  const auto prepared = test::prepare(matrix, threads, false);
  FactorOptions options;
  options.keep_factor = true;
  const Factorization f = prepared.factor(0, options);
  const auto n = static_cast<std::size_t>(matrix.rows);
  Random random(171);
  std::vector<double> b(n * static_cast<std::size_t>(columns)), x(b.size());
  for (double& v : b) v = test::uniform(random, -1, 1);
  const Buffer<Index>& position = prepared.analysis.tree.position_of;
  for (std::size_t c = 0; c < static_cast<std::size_t>(columns); ++c) {
    for (std::size_t i = 0; i < n; ++i)
      x[c * n + static_cast<std::size_t>(position[static_cast<Offset>(i)])] = b[c * n + i];
  }
  EXPECT_TRUE(solve(*f.factor, x.data(), columns).ok());
  const std::vector<double> expected = dense_solve(matrix, b, columns);
  double largest = 0, worst = 0;
  for (std::size_t c = 0; c < static_cast<std::size_t>(columns); ++c) {
    for (std::size_t i = 0; i < n; ++i) {
      const double mine = x[c * n + static_cast<std::size_t>(position[static_cast<Offset>(i)])];
      largest = std::max(largest, std::fabs(expected[c * n + i]));
      worst = std::max(worst, std::fabs(mine - expected[c * n + i]));
    }
  }
  return worst / largest;
}

TEST(Solve, SeveralRightHandSidesMatchLapack) {
  Random random(172);
  for (const Index columns : {1, 2, 7, 33}) {
    EXPECT_LT(difference(test::laplacian(8, 7, 6), columns, 1), 1e-13);
    EXPECT_LT(difference(test::laplacian(8, 7, 6, 6), columns, 2), 1e-10);
    EXPECT_LT(difference(test::saddle(random, 140, 45), columns, 1), 1e-9);
    EXPECT_LT(difference(test::random_sparse(random, 160, 14, 0.6, 0.5), columns, 2), 1e-8);
  }
}

TEST(Solve, OneEquationAndOnePair) {
  EXPECT_EQ(difference(from_triplets(1, {{0, 0, -4}}), 3, 1), 0);
  EXPECT_LT(difference(from_triplets(2, {{1, 0, 2}}), 3, 1), 1e-15);
}

TEST(Solve, EveryColumnIsSolvedAsIfAlone) {
  const auto prepared = test::prepare(test::laplacian(9, 8, 7, 3.1), 1);
  FactorOptions options;
  options.keep_factor = true;
  const Factorization f = prepared.factor(0, options);
  const std::size_t n = 504;
  Random random(173);
  std::vector<double> both(2 * n);
  for (double& v : both) v = test::uniform(random, -1, 1);
  std::vector<double> first(both.begin(), both.begin() + n), second(both.begin() + n, both.end());
  ASSERT_TRUE(solve(*f.factor, both.data(), 2).ok());
  ASSERT_TRUE(solve(*f.factor, first.data(), 1).ok());
  ASSERT_TRUE(solve(*f.factor, second.data(), 1).ok());
  double largest = 0;
  for (const double v : both) largest = std::max(largest, std::fabs(v));
  for (std::size_t i = 0; i < n; ++i) {
    EXPECT_NEAR(both[i], first[i], 1e-11 * largest);
    EXPECT_NEAR(both[n + i], second[i], 1e-11 * largest);
  }
}

TEST(Solve, RefinementReportsASmallBackwardErrorOnHardMatrices) {
  Random random(174);
  for (int round = 0; round < 10; ++round) {
    const SymmetricMatrix matrix =
        test::wildly_scaled(random, test::random_sparse(random, 200, 4, 0.5, 0.3), 6);
    const auto prepared = test::prepare(matrix);
    FactorOptions options;
    options.keep_factor = true;
    const Factorization f = prepared.factor(0, options);
    if (f.signs.zero > 0) continue;
    std::vector<double> b(200), x(200);
    for (double& v : b) v = test::uniform(random, -1, 1);
    double backward_error = 1;
    ASSERT_TRUE(solve_refined(*f.factor, prepared.shifted(0), b, x, 10, &backward_error).ok());
    EXPECT_LT(backward_error, 1e-13) << "round " << round;
  }
}

}  // namespace
}  // namespace stanchion
