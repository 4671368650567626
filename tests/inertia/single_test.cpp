// Factors in single precision that certify themselves, and what happens where they cannot.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "inertia/certify.hpp"
#include "numeric/rebuilt.hpp"
#include "support/dense_reference.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::laplacian;
using test::prepare;
using test::Random;

FactorOptions kept_in_single() {
  FactorOptions options;
  options.single = options.keep_factor = true;
  return options;
}

CertifiedInertia certify(const test::Prepared& prepared, SingleUse single, std::uint64_t seed = 1) {
  RiskBudget risk(1e-6);
  CertifyOptions options;
  options.risk = &risk;
  options.seed = seed;
  options.single = single;
  options.most_factor_bytes = Offset{1} << 40;
  auto result = certify_inertia(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  EXPECT_TRUE(result.ok()) << result.status().to_string();
  EXPECT_LE(risk.spent(), 1e-6);
  return result.ok() ? std::move(*result) : CertifiedInertia{};
}

/// Eigenvalues below `shift`, from the closed form.
Index below(const std::vector<double>& spectrum, double shift) {
  return static_cast<Index>(
      std::count_if(spectrum.begin(), spectrum.end(), [&](double v) { return v < shift; }));
}

TEST(SinglePrecision, TheProvedBoundHoldsMultipliedOut) {
  Random random(1701);
  double used = 0;
  for (int number = 0; number < 60; ++number) {
    const Index n = 20 + static_cast<Index>(random() % 60);
    SymmetricMatrix matrix = number % 3 == 0 ? laplacian(4, 5, 3 + number % 4, 0.1 * number)
                             : number % 3 == 1
                                 ? test::random_sparse(random, n, 6, 0.2, 0)
                                 : test::wildly_scaled(random, test::random_sparse(random, n, 5, 0.1, 0), 3);
    const auto prepared = prepare(matrix);
    const Factorization f = prepared.factor(0, kept_in_single());
    EXPECT_FALSE(f.fault) << number;
    if (f.breakdown) continue;
    const double error = test::largest_row_error(prepared.shifted(0), *f.factor);
    EXPECT_LE(error, f.error_bound) << number;
    used = std::max(used, error / f.error_bound);
    EXPECT_EQ(f.unit_roundoff, 0x1p-24);
  }
  EXPECT_GT(used, 1e-4) << "a bound this loose decides nothing";
}

TEST(SinglePrecision, CertifiesLaplaciansInHalfTheMemory) {
  const auto spectrum = test::laplacian_spectrum(15, 16, 17);
  // Far enough from eigenvalues (0.0025 at least) for the bound to close with whichever kernels and compiler.
  for (const double shift : {0.0, 0.5, 1.7}) {
    const auto prepared = prepare(laplacian(15, 16, 17, shift), 2);
    const auto found = certify(prepared, SingleUse::kOnly);
    EXPECT_EQ(found.certificate.level, Level::kStatistical) << shift;
    EXPECT_EQ(found.certificate.precision, "single");
    EXPECT_EQ(found.inertia.negative, below(spectrum, shift));
    EXPECT_EQ(found.redone_in_double, 0);
    FactorOptions kept;
    kept.keep_factor = true;
    EXPECT_LT(static_cast<double>(found.peak_bytes),
              0.65 * static_cast<double>(prepared.factor(0, kept).peak_bytes));
  }
}

TEST(SinglePrecision, GivesTheSameBitsForAnyNumberOfThreads) {
  const auto one = prepare(laplacian(14, 13, 12, 1.3), 1), three = prepare(laplacian(14, 13, 12, 1.3), 3);
  const auto a = certify(one, SingleUse::kOnly), b = certify(three, SingleUse::kOnly);
  EXPECT_EQ(a.certificate.relative_bound, b.certificate.relative_bound);
  EXPECT_EQ(a.certificate.error_bound, b.certificate.error_bound);
}

/// A cube of equal sides has 6 among its eigenvalues (closed form): next to it a factor in single precision
/// tells nothing, one in double does.
constexpr double kNextToSingular = 6 + 1e-6;

TEST(SinglePrecision, ABoundThatDoesNotCloseIsUnresolvedWhenNothingElseIsAllowed) {
  const auto found = certify(prepare(laplacian(11, 11, 11, kNextToSingular)), SingleUse::kOnly);
  EXPECT_EQ(found.certificate.level, Level::kNone);
  EXPECT_EQ(found.inertia.undecided, 1331);
  EXPECT_NE(found.unresolved_because.find("leave --precision out"), std::string::npos);
}

TEST(SinglePrecision, ABoundThatDoesNotCloseIsRedoneInDouble) {
  const auto found = certify(prepare(laplacian(11, 11, 11, kNextToSingular), 2), SingleUse::kFirst);
  EXPECT_NE(found.certificate.level, Level::kNone);
  EXPECT_EQ(found.certificate.precision, "double");
  EXPECT_EQ(found.redone_in_double, 1);
  EXPECT_GE(found.factorizations, 2);
  EXPECT_TRUE(found.single_hopeless);
  EXPECT_EQ(found.inertia.zero, 0);
  EXPECT_EQ(found.inertia.negative, below(test::laplacian_spectrum(11, 11, 11), kNextToSingular));
}

TEST(SinglePrecision, AnExactMechanismIsNeverCertified) {
  for (std::uint64_t seed = 1; seed <= 50; ++seed) {
    const auto found = certify(prepare(laplacian(7, 7, 7, 6)), SingleUse::kOnly, seed);
    EXPECT_EQ(found.certificate.level, Level::kNone) << seed;
  }
}

TEST(SinglePrecision, IsTakenOnlyWhereTheArithmeticIsMostOfTheWork) {
  auto prepared = prepare(laplacian(12, 12, 12, 0.41));
  RiskBudget risk(1e-6);
  CertifyOptions options;
  options.risk = &risk;
  options.single = SingleUse::kWhereFaster;
  options.most_factor_bytes = Offset{1} << 40;
  StructureForecast& forecast = prepared.analysis.forecast;
  EXPECT_FALSE(likely_work(prepared.analysis, options).single) << "a second factorization in double is cheap";
  // As if the same structure took more work: the choice looks at the forecast alone.
  forecast.front_flops = 1e10;
  forecast.stored_factor_entries = 5'000'000;
  EXPECT_TRUE(likely_work(prepared.analysis, options).single);
  auto found = certify(prepared, SingleUse::kWhereFaster);
  EXPECT_EQ(found.certificate.precision, "single");
  EXPECT_EQ(found.factorizations, 1);
  EXPECT_EQ(found.inertia.negative, below(test::laplacian_spectrum(12, 12, 12), 0.41));
  EXPECT_EQ(certify(prepared, SingleUse::kNever).certificate.precision, "double");
  forecast.stored_factor_entries = 50'000'000;
  EXPECT_FALSE(likely_work(prepared.analysis, options).single) << "passes over L would be most of the work";
}

TEST(SinglePrecision, EntriesBeyondItsRangeEndUnresolvedNeverWrong) {
  // Not scaled: entries of 1e300 and 1e-300 become infinite or zero in single precision.
  for (const double size : {1e300, 1e-300, 1e38, 1e-45}) {
    std::vector<Triplet> entries;
    for (Index i = 0; i < 12; ++i) entries.insert(entries.end(), {{i, i, -2 * size}});
    for (Index i = 1; i < 12; ++i) entries.push_back({i, i - 1, size});
    const auto found = certify(prepare(from_triplets(12, entries), 1, false), SingleUse::kOnly);
    if (found.certificate.level != Level::kNone) {
      EXPECT_EQ(found.inertia.negative, 12) << size;
    }
  }
}

}  // namespace
}  // namespace stanchion
