// Whole factorizations in double-double against exact rational inertias, and their manners.
#include <gtest/gtest.h>

#include "extended/exact.hpp"
#include "extended/factorize.hpp"
#include "inertia/two_offsets.hpp"
#include "support/dense_reference.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::exact_inertia;
using test::laplacian;
using test::prepare;
using test::Random;
using test::Rational;

std::array<Offset, 3> signs(const Factorization& f) {
  return {f.signs.negative, f.signs.zero, f.signs.positive};
}

Factorization factor_extended(const test::Prepared& prepared, double offset,
                              const FactorOptions& options = {}) {
  auto result = factorize_extended(prepared.analysis, prepared.shifted(offset), options, *prepared.pool);
  EXPECT_TRUE(result.ok()) << result.status().to_string();
  return result.ok() ? std::move(*result) : Factorization{};
}

/// Binomial matrix with `taken` subtracted from its last diagonal entry: determinant 1 - taken (the cofactor
/// of the last entry is 1), eigenvalues in reciprocal pairs when nothing is taken. Source: Higham, Accuracy
/// and Stability of Numerical Algorithms, 2nd ed. 2002, section 28.4.
SymmetricMatrix pascal(Index n, double taken) {
  std::vector<std::vector<double>> value(static_cast<std::size_t>(n),
                                         std::vector<double>(static_cast<std::size_t>(n), 1));
  std::vector<Triplet> entries;
  for (Index i = 0; i < n; ++i) {
    for (Index j = 0; j <= i; ++j) {
      const auto a = static_cast<std::size_t>(i), b = static_cast<std::size_t>(j);
      if (j > 0) value[a][b] = value[a][b - 1] + (i == j ? value[a][b - 1] : value[a - 1][b]);
      entries.push_back({i, j, value[a][b] - (i == n - 1 && j == n - 1 ? taken : 0)});
    }
  }
  return from_triplets(n, entries);
}

/// Inverse of the Hilbert matrix, by its closed form in integers (ibid., section 28.1), times `shrunk` in one
/// place.
SymmetricMatrix inverse_hilbert(Index n, double shrunk) {
  std::vector<Triplet> entries;
  double p = n;
  for (Index i = 0; i < n; ++i) {
    double r = p * p;
    entries.push_back({i, i, r / (2 * i + 1) * (i == 0 ? shrunk : 1)});
    for (Index j = i + 1; j < n; ++j) {
      r = -((n - j) * r * (n + j)) / (static_cast<double>(j) * j);
      entries.push_back({j, i, r / (i + j + 1)});
    }
    p = ((n - i - 1) * p * (n + i + 1)) / ((i + 1.0) * (i + 1.0));
  }
  return from_triplets(n, entries);
}

/// Diagonals of 1e-20 between entries of size one: pivoting is not a matter of taste here.
SymmetricMatrix tiny_diagonal(Random& random, Index n) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < n; ++i) {
    entries.push_back({i, i, 1e-20 * test::uniform(random, -1, 1)});
    for (Index j = std::max<Index>(0, i - 4); j < i; ++j)
      entries.push_back({i, j, test::uniform(random, -1, 1)});
  }
  return from_triplets(n, entries);
}

/// Path of springs with free ends: exactly singular, in integers.
SymmetricMatrix free_chain(Index n) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < n; ++i) entries.push_back({i, i, i == 0 || i == n - 1 ? 1.0 : 2.0});
  for (Index i = 1; i < n; ++i) entries.push_back({i, i - 1, -1});
  return from_triplets(n, entries);
}

std::vector<SymmetricMatrix> small_matrices() {
  Random random(61);
  std::vector<SymmetricMatrix> list;
  list.push_back(pascal(14, 0));
  list.push_back(pascal(14, 1));
  list.push_back(pascal(14, 2));
  list.push_back(inverse_hilbert(9, 1));
  list.push_back(inverse_hilbert(9, 0.5));
  list.push_back(tiny_diagonal(random, 14));
  list.push_back(test::saddle(random, 12, 5));
  list.push_back(test::wildly_scaled(random, test::random_sparse(random, 16, 4, 0.5, 0), 4));
  list.push_back(test::random_sparse(random, 20, 3, 0.9, 0));
  list.push_back(free_chain(24));
  return list;
}

using Factorize = Result<Factorization> (*)(const Analysis&, const ShiftedMatrix&, const FactorOptions&,
                                            ThreadPool&);

/// Weyl: #{lambda < c - bound} <= n-(D) <= #{lambda < c + bound}, both sides exact.
void expect_bracketed(Factorize factorize_by, const SymmetricMatrix& matrix, double offset) {
  const auto prepared = prepare(matrix, 1, false);
  const auto f = factorize_by(prepared.analysis, prepared.shifted(offset), {}, *prepared.pool);
  ASSERT_TRUE(f.ok());
  ASSERT_FALSE(f->breakdown);
  EXPECT_EQ(f->signs.negative + f->signs.zero + f->signs.positive, matrix.rows);
  const Rational c(offset), bound(f->error_bound);
  EXPECT_GE(f->signs.negative, exact_inertia(matrix, c - bound)[0]) << offset;
  EXPECT_LE(f->signs.negative, exact_inertia(matrix, c + bound)[0]) << offset;
}

TEST(FactorizeExtended, CountsLieBetweenExactInertiasOneBoundApart) {
  for (const SymmetricMatrix& matrix : small_matrices()) {
    for (const double offset : {0.0, 0x1p-90, 1e-3}) expect_bracketed(factorize_extended, matrix, offset);
    for (const double offset : {0.0, -0x1p-44}) expect_bracketed(factorize_plainly, matrix, offset);
  }
}

TEST(FactorizeExtended, BoundIsFifteenDigitsBelowThatOfDouble) {
  const auto prepared = prepare(laplacian(9, 8, 7, 2.9));
  const auto plain = prepared.factor(0), fine = factor_extended(prepared, 0);
  EXPECT_EQ(signs(fine), signs(plain));
  EXPECT_LT(fine.error_bound, 1e-13 * plain.error_bound);
  EXPECT_GT(fine.error_bound, 0);
}

TEST(FactorizeExtended, OffsetsBelowTheReachOfDoubleAreSeen) {
  const auto prepared = prepare(free_chain(200), 1, false);
  EXPECT_EQ(signs(factor_extended(prepared, 1e-25)), (std::array<Offset, 3>{1, 0, 199}));
  EXPECT_EQ(signs(factor_extended(prepared, -1e-25)), (std::array<Offset, 3>{0, 0, 200}));
}

TEST(FactorizeExtended, LaplacianCountsMatchTheClosedForm) {
  const auto spectrum = test::laplacian_spectrum(9, 8, 7);
  for (const double shift : {0.31, 2.9, 5.01, 11.9}) {
    const auto f = factor_extended(prepare(laplacian(9, 8, 7, shift)), 0);
    const auto below = std::count_if(spectrum.begin(), spectrum.end(), [&](double v) { return v < shift; });
    EXPECT_EQ(signs(f), (std::array<Offset, 3>{below, 0, Offset{504} - below})) << "shift " << shift;
  }
}

TEST(FactorizeExtended, DelayedColumnsAndPairsArriveAtTheRightCounts) {
  Random random(67);
  Offset delayed = 0, pairs = 0;
  for (int round = 0; round < 12; ++round) {
    const SymmetricMatrix matrix = test::random_sparse(random, 60 + 20 * round, 4, 0.8, 0);
    const auto f = factor_extended(prepare(matrix, 1, false), 0);
    ASSERT_FALSE(f.breakdown);
    const auto values = test::eigenvalues(matrix);
    const double noise = 1e-13 * std::max(std::fabs(values.front()), std::fabs(values.back()));
    const auto negative = std::count_if(values.begin(), values.end(), [&](double v) { return v < -noise; });
    const auto positive = std::count_if(values.begin(), values.end(), [&](double v) { return v > noise; });
    EXPECT_GE(f.signs.negative + f.signs.zero, negative);
    EXPECT_GE(f.signs.positive + f.signs.zero, positive);
    EXPECT_EQ(f.signs.negative + f.signs.zero + f.signs.positive, matrix.rows);
    EXPECT_LT(f.error_bound, 1e-22);
    delayed += f.delayed_pivots;
    pairs += f.two_by_two_pivots;
  }
  EXPECT_GT(delayed, 10);
  EXPECT_GT(pairs, 10);
}

TEST(FactorizeExtended, ZeroRowsAreZeroPivotsAndPartsAreCountedApart) {
  const SymmetricMatrix matrix = from_triplets(6, {{0, 0, 2}, {2, 2, -3}, {4, 4, 1}, {5, 4, 2}, {5, 5, 1}});
  const auto f = factor_extended(prepare(matrix), 0);
  EXPECT_EQ(signs(f), (std::array<Offset, 3>{2, 2, 2}));
  Offset negative = 0, most_in_one = 0;
  for (const PivotSigns& part : f.component_signs) {
    negative += part.negative;
    most_in_one = std::max(most_in_one, part.negative);
  }
  EXPECT_EQ(f.component_signs.size(), 5U);
  EXPECT_EQ(negative, 2);
  EXPECT_EQ(most_in_one, 1);
}

TEST(FactorizeExtended, DefiniteAttemptStopsAtTheFirstBadPivot) {
  FactorOptions options;
  options.definite = true;
  EXPECT_FALSE(factor_extended(prepare(laplacian(6, 6, 6)), 0, options).stopped);
  EXPECT_TRUE(factor_extended(prepare(laplacian(6, 6, 6, 0.7)), 0, options).stopped);
}

TEST(FactorizeExtended, OverflowIsABreakdownAndNotACount) {
  const SymmetricMatrix huge = from_triplets(2, {{0, 0, 1e-250}, {1, 0, 1e200}, {1, 1, 1e-250}});
  const auto one = factor_extended(prepare(huge, 1, false), 0);
  EXPECT_EQ(signs(one), (std::array<Offset, 3>{1, 0, 1}));
  const SymmetricMatrix beyond = from_triplets(2, {{0, 0, 1e300}, {1, 0, 1e-10}, {1, 1, 1e300}});
  EXPECT_TRUE(factor_extended(prepare(beyond, 1, false), 0).breakdown);
}

TEST(FactorizeExtended, SameBitsForAnyNumberOfThreads) {
  const SymmetricMatrix matrix = laplacian(20, 20, 20, 2.03);
  const auto one = factor_extended(prepare(matrix, 1), 0);
  for (const int threads : {2, 3}) {
    const auto prepared = prepare(matrix, threads);
    EXPECT_FALSE(prepared.analysis.schedule.shared_fronts.empty());
    const auto many = factor_extended(prepared, 0);
    EXPECT_EQ(signs(many), signs(one));
    EXPECT_EQ(many.error_bound, one.error_bound);  // to the last bit
    EXPECT_EQ(many.delayed_pivots, one.delayed_pivots);
  }
}

TEST(FactorizeExtended, MemoryCapCancellationAndProgressAreHonoured) {
  const auto prepared = prepare(laplacian(12, 12, 12));
  FactorOptions options;
  options.memory_cap_bytes = 100'000;
  const auto capped = factorize_extended(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  ASSERT_FALSE(capped.ok());
  EXPECT_EQ(capped.status().code(), "memory-cap");
  options = {};
  CancellationToken token;
  token.cancel();
  options.cancel = &token;
  const auto cancelled = factorize_extended(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  ASSERT_FALSE(cancelled.ok());
  EXPECT_EQ(cancelled.status().kind(), StatusKind::kInterrupted);
  options = {};
  double last = 0;
  bool ascending = true;
  options.progress = [&](const char*, double fraction) {
    ascending = ascending && fraction >= last;
    last = fraction;
  };
  const auto f = factor_extended(prepared, 0, options);
  EXPECT_TRUE(ascending);
  EXPECT_DOUBLE_EQ(last, 1);
  EXPECT_LE(f.peak_bytes, extended_peak_bytes_forecast(prepared.analysis) + (1 << 20));
}

TEST(FactorizeExtended, ForecastGrowsWithTheWork) {
  const double small = extended_seconds_forecast(prepare(laplacian(8, 8, 8)).analysis);
  const double large = extended_seconds_forecast(prepare(laplacian(20, 20, 20)).analysis);
  EXPECT_GT(small, 0);
  EXPECT_GT(large, 10 * small);
}

CertifiedInertia certify(const SymmetricMatrix& matrix, bool extended) {
  const auto prepared = prepare(matrix);
  OffsetOptions options;
  options.extended = extended;
  auto result = certify_by_offsets(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  EXPECT_TRUE(result.ok()) << result.status().to_string();
  return result.ok() ? std::move(*result) : CertifiedInertia{};
}

TEST(ExtendedOffsets, SettlesWhatDoubleLeavesOpen) {
  for (const double taken : {0.0, 2.0}) {
    const SymmetricMatrix matrix = pascal(22, taken);
    const auto exact = exact_inertia(matrix);
    ASSERT_EQ(exact[0], taken == 2 ? 1 : 0);
    EXPECT_GT(certify(matrix, false).inertia.zero, 0);
    const auto found = certify(matrix, true);
    EXPECT_EQ(found.certificate.level, Level::kProved);
    EXPECT_EQ(found.certificate.precision, "extended");
    EXPECT_EQ(found.inertia.negative, exact[0]);
    EXPECT_EQ(found.inertia.zero, 0);
    EXPECT_EQ(found.inertia.positive, exact[2]);
  }
}

TEST(ExtendedOffsets, ExactSingularityStaysZeroAtAMuchFinerResolution) {
  const auto found = certify(pascal(22, 1), true);
  EXPECT_EQ(found.inertia.negative, 0);
  EXPECT_EQ(found.inertia.zero, 1);
  EXPECT_LT(found.certificate.resolution.value_or(1), 1e-20);
}

TEST(ExtendedOffsets, AgreesWithExactInertiasOnEveryAdversary) {
  for (const SymmetricMatrix& matrix : small_matrices()) {
    const auto exact = exact_inertia(matrix);
    const auto found = certify(matrix, true);
    EXPECT_EQ(found.certificate.level, Level::kProved);
    EXPECT_EQ(found.inertia.negative, exact[0]);
    EXPECT_EQ(found.inertia.zero, exact[1]);
    EXPECT_EQ(found.inertia.positive, exact[2]);
  }
}

}  // namespace
}  // namespace stanchion
