// Source: facts.json: inertia by dense eigenvalues or exact rational elimination, checked against the
// published metadata of the SuiteSparse Matrix Collection. One factorization, judged within its own error
// bound.
#include <gtest/gtest.h>

#include "io/read_matrix.hpp"
#include "oracle/shared_facts.hpp"
#include "support/factored.hpp"

namespace stanchion {
namespace {

SymmetricMatrix read(const std::string& path) {
  ThreadPool pool(1);
  auto file = read_matrix(path, {}, pool);
  EXPECT_TRUE(file.ok()) << file.status().to_string();
  return file.ok() ? std::move(file->matrix) : SymmetricMatrix{};
}

/// Weyl: with ||E|| below the smallest nonzero |eigenvalue| no sign can be lost, only zeros can take one.
void expect_consistent(const Factorization& f, const test::Signs& known) {
  EXPECT_GE(f.signs.negative, known[0]);
  EXPECT_GE(f.signs.positive, known[2]);
  EXPECT_EQ(f.signs.negative + f.signs.zero + f.signs.positive, known[0] + known[1] + known[2]);
}

TEST(FactsOfFactorizations, SignsMatchDenseEigenvaluesWithinTheBound) {
  if (!test::shared_data_present()) GTEST_SKIP() << "no shared data beside the project";
  int conclusive = 0;
  for (const auto& fact : test::matrix_facts()) {
    if (!fact.gap) continue;
    SCOPED_TRACE(fact.name);
    const auto f = test::prepare(read(fact.path), 1, false).factor(0);
    ASSERT_FALSE(f.breakdown);
    if (f.error_bound >= *fact.gap) continue;  // the bound itself says that signs may differ
    ++conclusive;
    expect_consistent(f, fact.inertia);
  }
  // All that have a known gap: the bounds are never so loose that nothing follows.
  EXPECT_GE(conclusive, 20);
}

TEST(FactsOfFactorizations, DiagonalMatricesAreCountedExactly) {
  if (!test::shared_data_present()) GTEST_SKIP() << "no shared data beside the project";
  int diagonal = 0;
  for (const auto& fact : test::matrix_facts()) {
    if (!fact.diagonal) continue;
    SCOPED_TRACE(fact.name);
    ++diagonal;
    const auto f = test::prepare(read(fact.path)).factor(0);
    EXPECT_EQ(f.signs.negative, fact.inertia[0]);
    EXPECT_EQ(f.signs.zero, fact.inertia[1]);
    EXPECT_EQ(f.signs.positive, fact.inertia[2]);
  }
  EXPECT_GE(diagonal, 7);
}

TEST(FactsOfFactorizations, PositiveDefiniteOnesPassTheDefiniteAttempt) {
  if (!test::shared_data_present()) GTEST_SKIP() << "no shared data beside the project";
  int definite = 0, others = 0;
  for (const auto& fact : test::matrix_facts()) {
    SCOPED_TRACE(fact.name);
    FactorOptions options;
    options.definite = true;
    const auto f = test::prepare(read(fact.path)).factor(0, options);
    const bool passed = !f.stopped && !f.breakdown;
    if (fact.inertia[0] == 0 && fact.inertia[1] == 0) {
      ++definite;
      EXPECT_TRUE(passed);
    } else if (fact.inertia[0] > 0) {
      ++others;
      EXPECT_FALSE(passed);
    }
  }
  EXPECT_GE(definite, 25);
  EXPECT_GE(others, 7);
}

}  // namespace
}  // namespace stanchion
