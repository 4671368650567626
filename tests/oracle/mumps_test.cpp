// Source: sequential MUMPS, symmetric indefinite LDL^T with threshold pivoting, on the same matrix.
#include <gtest/gtest.h>

#include "oracle/certified.hpp"
#include "oracle/mumps_solver.hpp"
#include "specimen/specimen.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::MumpsSolver;
using test::Random;

Offset mumps_negative(const SymmetricMatrix& matrix) {
  MumpsSolver solver(matrix, {});
  EXPECT_TRUE(solver.analyse().ok);
  const auto f = solver.factor();
  EXPECT_TRUE(f.ok) << "MUMPS error " << f.error_code;
  return f.negative;
}

/// Both solvers must agree where ours proves that no eigenvalue is near zero.
void expect_same_inertia(const SymmetricMatrix& matrix) {
  const auto found = test::certify(test::prepare(matrix, 2));
  ASSERT_EQ(found.certificate.level, Level::kProved);
  ASSERT_EQ(found.inertia.zero, 0) << "the test matrix is too close to singular";
  EXPECT_EQ(found.inertia.negative, mumps_negative(matrix));
}

/// K + coefficient * second, formed.
SymmetricMatrix formed(const SymmetricMatrix& first, const SymmetricMatrix& second, double coefficient) {
  std::vector<Triplet> entries;
  const auto add = [&](const SymmetricMatrix& matrix, double factor) {
    for (Index j = 0; j < matrix.rows; ++j) {
      for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
        entries.push_back({matrix.row[k], j, factor * matrix.value[k]});
      }
    }
  };
  add(first, 1);
  add(second, coefficient);
  return from_triplets(first.rows, entries);
}

TEST(Mumps, InertiaOfShiftedLaplaciansAgrees) {
  for (const double shift : {0.37, 2.03, 5.99, 8.1}) {
    SCOPED_TRACE(shift);
    expect_same_inertia(test::laplacian(13, 15, 17, shift));
  }
}

// Fourteen entries a row: with few, random rows with a zero diagonal are singular by structure alone.
TEST(Mumps, InertiaOfRandomIndefiniteMatricesAgrees) {
  Random random(31);
  for (int round = 0; round < 12; ++round) {
    SCOPED_TRACE(round);
    expect_same_inertia(
        test::random_sparse(random, 400 + 100 * round, 14, 0.1 * (round % 8), 0.2 * (round % 5)));
  }
}

TEST(Mumps, InertiaOfWildlyScaledMatricesAgrees) {
  Random random(37);
  for (int round = 0; round < 6; ++round) {
    SCOPED_TRACE(round);
    expect_same_inertia(test::wildly_scaled(random, test::random_sparse(random, 800, 14, 0.2, 0.5), 4));
  }
}

TEST(Mumps, InertiaOfSaddlePointsAgrees) {
  Random random(41);
  for (const Index constraints : {40, 300, 900}) {
    SCOPED_TRACE(constraints);
    expect_same_inertia(test::saddle(random, 1500, constraints));
  }
  for (const Offset unknowns : {600, 6000, 20'000}) {
    SCOPED_TRACE(unknowns);
    const auto specimen = make_specimen("saddle", unknowns);
    ASSERT_TRUE(specimen.ok());
    EXPECT_EQ(mumps_negative(specimen->stiffness), specimen->expected.inertia.negative);
    expect_same_inertia(specimen->stiffness);
  }
}

TEST(Mumps, InertiaOfLoadedModelsAgreesAroundAndFarBeyondCriticalLoads) {
  for (const char* name : {"plate", "frame", "lattice", "column"}) {
    const auto specimen = make_specimen(name, 4000);
    ASSERT_TRUE(specimen.ok());
    ASSERT_TRUE(specimen->geometric);
    for (const double factor : {-3.0, 0.5, 3.0, 40.0}) {
      SCOPED_TRACE(std::string(name) + " at " + std::to_string(factor));
      expect_same_inertia(formed(specimen->stiffness, *specimen->geometric, factor));
    }
  }
}

TEST(Mumps, InertiaOfVibrationPencilsAgrees) {
  for (const char* name : {"solid", "frame"}) {
    const auto specimen = make_specimen(name, 3000);
    ASSERT_TRUE(specimen.ok());
    ASSERT_TRUE(specimen->mass);
    for (const double frequency : {50.0, 500.0, 5000.0}) {
      SCOPED_TRACE(std::string(name) + " at " + std::to_string(frequency));
      expect_same_inertia(formed(specimen->stiffness, *specimen->mass, -frequency * frequency));
    }
  }
}

TEST(Mumps, DefiniteModelsHaveNoNegativePivotInEither) {
  const auto specimen = make_specimen("solid", 6000);
  ASSERT_TRUE(specimen.ok());
  MumpsSolver solver(specimen->stiffness, {.definite = true, .discard_factors = true});
  ASSERT_TRUE(solver.analyse().ok);
  const auto f = solver.factor();
  ASSERT_TRUE(f.ok);
  EXPECT_TRUE(f.definite);
  expect_same_inertia(specimen->stiffness);
}

}  // namespace
}  // namespace stanchion
