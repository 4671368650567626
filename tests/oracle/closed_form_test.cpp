// Source: closed form, eigenvalues of the 7-point Laplacian of a box are sums of 4 sin^2(k pi / (2 (n + 1)))
// over the three directions; and Wilkinson's W21+ (The Algebraic Eigenvalue Problem, 1965, p. 308).
#include <gtest/gtest.h>

#include "oracle/closed_form.hpp"

namespace stanchion {
namespace {

TEST(ClosedForm, LaplacianOfThirtyThousandCountsExactlyBetweenEigenvalues) {
  // 29 * 31 * 33 = 29,667; unequal sides keep the spectrum apart.
  EXPECT_EQ(test::expect_closed_form_counts(29, 31, 33, {0.0, 0.001, 0.1, 0.5, 0.97}, 1e-5, 2), 5);
}

TEST(ClosedForm, CubeWithRepeatedEigenvaluesCountsMultiplicitiesInFull) {
  // Equal sides: almost every eigenvalue comes three or six times.
  EXPECT_EQ(test::expect_closed_form_counts(20, 20, 20, {0.0, 0.01, 0.3, 0.7}, 1e-4, 2), 4);
}

TEST(ClosedForm, LaplacianBelowItsSpectrumIsDefiniteAndAboveItNegative) {
  OffsetOptions options;
  options.definite_first = true;
  const auto definite = test::certify(test::prepare(test::laplacian(31, 31, 31), 2), options);
  EXPECT_EQ(definite.inertia.positive, 29'791);
  EXPECT_EQ(definite.factorizations, 1);
  const auto negative = test::certify(test::prepare(test::laplacian(31, 31, 31, 12.0), 2));
  EXPECT_EQ(negative.inertia.negative, 29'791);
}

TEST(ClosedForm, AnEigenvalueExactlyAtTheShiftIsZeroAtTheResolution) {
  // 2 - 2 cos(pi / 3) = 1 for k = 1, n = 2, and 3 for k = 2: the 2 x 2 x 2 box has 3, 5 (3), 7 (3), 9.
  const auto found = test::certify(test::prepare(test::laplacian(2, 2, 2, 5)));
  EXPECT_EQ(found.inertia.negative, 1);
  EXPECT_EQ(found.inertia.zero, 3);
  EXPECT_EQ(found.inertia.positive, 4);
}

/// W21+: diagonal 10, 9, ..., 0, ..., 9, 10 and ones beside it; eigenvalues in pairs closer and closer.
SymmetricMatrix wilkinson(double shift) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < 21; ++i) {
    entries.push_back({i, i, std::fabs(10.0 - i) - shift});
    if (i > 0) entries.push_back({i, i - 1, 1});
  }
  return from_triplets(21, entries);
}

TEST(ClosedForm, WilkinsonsW21HasOneNegativeEigenvalue) {
  const auto found = test::certify(test::prepare(wilkinson(0)));
  EXPECT_EQ(found.inertia.negative, 1);
  EXPECT_EQ(found.inertia.positive, 20);
}

TEST(ClosedForm, WilkinsonsTopPairIsTwoZerosBetweenItsMembers) {
  // The two are 7.2e-14 apart: below any resolution that is proved by offsets in double precision.
  const auto found = test::certify(test::prepare(wilkinson(10.7461941829033576)));
  EXPECT_LE(found.inertia.negative, 20);
  EXPECT_GE(found.inertia.negative, 19);
  EXPECT_EQ(found.inertia.negative + found.inertia.zero + found.inertia.positive, 21);
  EXPECT_LE(found.inertia.positive, 1);
}

}  // namespace
}  // namespace stanchion
