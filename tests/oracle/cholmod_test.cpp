// Source: CHOLMOD, given the same matrix and, for structure, the same elimination order.
#include <gtest/gtest.h>

#include "oracle/certified.hpp"
#include "oracle/cholmod_solver.hpp"
#include "specimen/specimen.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::CholmodSolver;
using test::Random;

std::vector<Index> order_of(const Analysis& analysis) {
  return {analysis.tree.equation_at.begin(), analysis.tree.equation_at.end()};
}

SymmetricMatrix stiffness_of(const std::string& name, Offset unknowns) {
  auto specimen = make_specimen(name, unknowns);
  EXPECT_TRUE(specimen.ok()) << specimen.status().to_string();
  return std::move(specimen->stiffness);
}

/// Where every equation stands for itself, or groups share one structure exactly, nothing is lost to
/// grouping.
TEST(Cholmod, FactorEntriesAndFlopsEqualItsColumnCounts) {
  Random random(17);
  std::vector<std::pair<std::string, SymmetricMatrix>> matrices;
  matrices.emplace_back("laplacian", test::laplacian(17, 18, 19));
  matrices.emplace_back("random", test::random_sparse(random, 4000, 4, 0, 8));
  matrices.emplace_back("solid", stiffness_of("solid", 6000));
  for (const auto& [name, matrix] : matrices) {
    SCOPED_TRACE(name);
    const auto analysis = analyse({&matrix, {}, true}, 1);
    ASSERT_TRUE(analysis.ok());
    CholmodSolver solver(matrix);
    const auto structure = solver.analyse(order_of(*analysis));
    ASSERT_TRUE(structure.ok);
    EXPECT_EQ(analysis->forecast.factor_entries, structure.factor_entries);
    EXPECT_DOUBLE_EQ(analysis->forecast.factor_flops, structure.factor_flops);
  }
}

/// Grouping equations that the structure nearly agrees on may add entries, never lose one, and stays within a
/// tenth.
TEST(Cholmod, GroupedOrderingCostsAtMostATenthMoreThanItsColumnCounts) {
  for (const char* name : {"plate", "frame", "lattice", "column"}) {
    SCOPED_TRACE(name);
    const SymmetricMatrix matrix = stiffness_of(name, 12'000);
    const auto analysis = analyse({&matrix, {}, true}, 1);
    ASSERT_TRUE(analysis.ok());
    CholmodSolver solver(matrix);
    const auto structure = solver.analyse(order_of(*analysis));
    ASSERT_TRUE(structure.ok);
    EXPECT_GE(analysis->forecast.factor_entries, structure.factor_entries);
    EXPECT_LE(static_cast<double>(analysis->forecast.factor_entries),
              1.1 * static_cast<double>(structure.factor_entries));
    EXPECT_LE(analysis->forecast.factor_flops, 1.1 * structure.factor_flops);
  }
}

TEST(Cholmod, OurOrderIsNoWorseThanItsOwnByMoreThanAFifth) {
  for (const char* name : {"solid", "plate", "frame", "lattice", "laplace"}) {
    SCOPED_TRACE(name);
    const SymmetricMatrix matrix = stiffness_of(name, 20'000);
    const auto analysis = analyse({&matrix, {}, true}, 1);
    ASSERT_TRUE(analysis.ok());
    CholmodSolver solver(matrix);
    const auto structure = solver.analyse();
    ASSERT_TRUE(structure.ok);
    EXPECT_LE(analysis->forecast.factor_flops, 1.2 * structure.factor_flops);
  }
}

/// True when our unpivoted attempt went through on the matrix as it is.
bool our_attempt_passes(const SymmetricMatrix& matrix) {
  FactorOptions options;
  options.definite = true;
  const auto f = test::prepare(matrix, 2).factor(0, options);
  return !f.stopped && !f.breakdown;
}

bool cholmod_passes(const SymmetricMatrix& matrix) {
  CholmodSolver solver(matrix);
  EXPECT_TRUE(solver.analyse().ok);
  const auto f = solver.factor();
  EXPECT_TRUE(f.ok);
  return f.definite;
}

TEST(Cholmod, DefiniteAttemptAgreesOnModels) {
  for (const SpecimenEntry& entry : specimen_list()) {
    SCOPED_TRACE(entry.name);
    const auto specimen = make_specimen(entry.name, 5000);
    ASSERT_TRUE(specimen.ok());
    const bool definite = specimen->expected.inertia.negative == 0 && specimen->expected.inertia.zero == 0;
    EXPECT_EQ(cholmod_passes(specimen->stiffness), definite);
    EXPECT_EQ(our_attempt_passes(specimen->stiffness), definite);
  }
}

TEST(Cholmod, DefiniteAttemptAgreesOnBothSidesOfTheLowestEigenvalue) {
  const auto spectrum = test::laplacian_spectrum(13, 14, 15);
  const double lowest = *std::min_element(spectrum.begin(), spectrum.end());
  for (const double factor : {0.5, 0.999, 1.001, 2.0}) {
    const SymmetricMatrix matrix = test::laplacian(13, 14, 15, factor * lowest);
    EXPECT_EQ(cholmod_passes(matrix), factor < 1) << factor;
    EXPECT_EQ(our_attempt_passes(matrix), factor < 1) << factor;
  }
}

TEST(Cholmod, DefiniteAttemptAgreesOnRandomMatricesNearTheEdge) {
  Random random(23);
  int passed = 0, stopped = 0;
  for (int round = 0; round < 30; ++round) {
    const SymmetricMatrix matrix = test::random_sparse(random, 300, 4, 0, 1.0 + 0.15 * (round % 20));
    const bool theirs = cholmod_passes(matrix);
    EXPECT_EQ(our_attempt_passes(matrix), theirs) << "round " << round;
    ++(theirs ? passed : stopped);
  }
  // The rounds cover both outcomes.
  EXPECT_GE(passed, 3);
  EXPECT_GE(stopped, 3);
}

}  // namespace
}  // namespace stanchion
