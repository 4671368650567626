// The detector of machine faults stays silent on a sound machine, whatever the matrix.
#include "numeric/fault_probe.hpp"

#include <gtest/gtest.h>

#include <cmath>

#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;

void expect_silent(const SymmetricMatrix& matrix, std::uint64_t seed, double offset = 0, bool scaled = true) {
  const auto prepared = test::prepare(matrix, 1, scaled);
  for (const bool definite : {true, false}) {
    FactorOptions options;
    options.definite = definite;
    options.seed = seed;
    const Factorization f = prepared.factor(offset, options);
    EXPECT_FALSE(f.fault) << "row " << f.fault_row << " of " << matrix.rows << ", definite " << definite;
    EXPECT_FALSE(f.breakdown);
  }
}

TEST(FaultProbe, TheProductIsRightWithinItsBound) {
  Random random(41);
  const auto prepared =
      test::prepare(test::wildly_scaled(random, test::random_sparse(random, 60, 6, 0.2, 0), 3), 1, false);
  const ShiftedMatrix matrix = prepared.shifted(0.7);
  const FaultProbe probe = draw_fault_probe(matrix, 9);
  std::vector<long double> exact(60, 0.0L);
  for (Index j = 0; j < 60; ++j) {
    for (Offset k = matrix.family->column_start[j]; k < matrix.family->column_start[Offset{j} + 1]; ++k) {
      const Index i = matrix.family->row[k];
      const double value = matrix.entry(k, i, j) - (i == j ? matrix.offset : 0);
      exact[static_cast<std::size_t>(i)] += static_cast<long double>(value) * probe.sign[j];
      if (i != j) exact[static_cast<std::size_t>(j)] += static_cast<long double>(value) * probe.sign[i];
    }
  }
  int rounded = 0;
  for (Index i = 0; i < 60; ++i) {
    const auto error = static_cast<double>(std::fabs(exact[static_cast<std::size_t>(i)] - probe.product[i]));
    EXPECT_LE(error, probe.product_error[i]);
    EXPECT_LE(probe.product_error[i], 1e-13 * 1e6);
    rounded += error > 0;
  }
  EXPECT_GT(rounded, 0);
}

TEST(FaultProbe, SignsDependOnTheSeedAndTheOffsetAlone) {
  const auto prepared = test::prepare(test::laplacian(8, 8, 8));
  const auto signs = [&](double offset, std::uint64_t seed) {
    const FaultProbe probe = draw_fault_probe(prepared.shifted(offset), seed);
    return std::vector<signed char>(probe.sign.begin(), probe.sign.end());
  };
  EXPECT_EQ(signs(0.5, 1), signs(0.5, 1));
  EXPECT_NE(signs(0.5, 1), signs(0.5, 2));
  EXPECT_NE(signs(0.5, 1), signs(-0.5, 1));
  int positive = 0;
  for (const signed char s : signs(0, 1)) {
    EXPECT_EQ(s * s, 1);
    positive += s > 0;
  }
  EXPECT_NEAR(positive, 256, 60);
}

TEST(FaultProbe, NoFalseAlarmOnThousandsOfRandomMatrices) {
  Random random(42);
  for (int round = 0; round < 1200; ++round) {
    const auto n = static_cast<Index>(1 + round % 60);
    const double zero = round % 5 == 0 ? 1.0 : 0.2 * (round % 5), dominance = round % 3 == 0 ? 4 : 0;
    SymmetricMatrix matrix = test::random_sparse(random, n, 1 + round % 7, zero, dominance);
    if (round % 2 == 0) matrix = test::wildly_scaled(random, std::move(matrix), 1 + round % 6);
    expect_silent(matrix, static_cast<std::uint64_t>(round), round % 4 == 0 ? 0 : 1e-3, round % 3 != 1);
  }
}

TEST(FaultProbe, NoFalseAlarmWithHeavyDelaysAndLargeFronts) {
  Random random(43);
  for (const Index n : {200, 500, 900}) {
    expect_silent(test::random_sparse(random, n, 6, 1.0, 0), 1);
    expect_silent(test::saddle(random, n, n / 3), 2);
    expect_silent(test::wildly_scaled(random, test::random_sparse(random, n, 6, 0.5, 0), 8), 3, 0, false);
  }
  expect_silent(test::laplacian(24, 23, 22), 4);
  expect_silent(test::laplacian(24, 23, 22, 2.03), 5);
  expect_silent(test::laplacian(17, 16, 15, 6), 6);
}

TEST(FaultProbe, NoFalseAlarmOnDenseRows) {
  // An arrow and a full matrix with entries that cancel in the product.
  std::vector<Triplet> arrow, full;
  Random random(44);
  for (Index i = 0; i < 3000; ++i) {
    arrow.push_back({i, i, i == 0 ? 1.0 : test::uniform(random, -2, 2)});
    if (i > 0) arrow.push_back({i, 0, test::uniform(random, -1, 1)});
  }
  for (Index i = 0; i < 300; ++i) {
    for (Index j = 0; j <= i; ++j)
      full.push_back({i, j, test::uniform(random, -1, 1) * std::pow(10, (i + j) % 7)});
  }
  for (std::uint64_t seed = 0; seed < 5; ++seed) {
    expect_silent(from_triplets(3000, arrow), seed);
    expect_silent(from_triplets(300, full), seed);
  }
}

TEST(FaultProbe, SameBitsOfTheFactorsWhateverTheSeed) {
  const auto prepared = test::prepare(test::laplacian(14, 13, 12, 2.03));
  FactorOptions one, other;
  other.seed = 77;
  EXPECT_EQ(prepared.factor(0, one).error_bound, prepared.factor(0, other).error_bound);
}

}  // namespace
}  // namespace stanchion
