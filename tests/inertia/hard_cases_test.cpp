// Cases on which general-purpose solvers give confident, differing integers.
#include <gtest/gtest.h>

#include <cmath>

#include "inertia/certify.hpp"
#include "specimen/specimen.hpp"
#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::prepare;

CertifiedInertia certify(const test::Prepared& prepared, bool definite_first = false,
                         std::uint64_t seed = 1) {
  RiskBudget risk(1e-6);
  CertifyOptions options;
  options.risk = &risk;
  options.seed = seed;
  options.most_factor_bytes = Offset{1} << 40;
  options.offsets.definite_first = definite_first;
  auto result = certify_inertia(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  EXPECT_TRUE(result.ok()) << result.status().to_string();
  return result.ok() ? std::move(*result) : CertifiedInertia{};
}

/// True when `negative` is among what the certificate allows.
bool allows(const CertifiedInertia& found, Index negative, Index rows) {
  if (found.certificate.level == Level::kNone) return true;
  return found.inertia.negative <= negative && negative <= found.inertia.negative + found.inertia.zero &&
         found.inertia.negative + found.inertia.zero + found.inertia.positive == rows;
}

/// Springs in a row, held at one end; `stiffness(i)` of the link between i - 1 and i. Whole numbers only:
/// with one end free it is exactly singular, yet elimination rounds and leaves a last pivot of noise.
template <class Stiffness>
SymmetricMatrix chain(Index n, double held, const Stiffness& stiffness) {
  std::vector<Triplet> entries{{0, 0, held}};
  for (Index i = 1; i < n; ++i) {
    const double k = stiffness(i);
    entries.insert(entries.end(), {{i, i, k}, {i - 1, i - 1, k}, {i, i - 1, -k}});
  }
  return from_triplets(n, entries);
}

TEST(HardCases, RetryingUntilItPassesDoesNotInflateTheRisk) {
  // An exactly singular matrix must not be certified; chance lets single attempts through. However often a
  // document tries again, the share of documents that get through stays below the risk (certificate by
  // Bonferroni's bound).
  constexpr int kDocuments = 400, kAttempts = 12;
  constexpr double kRisk = 0.3;
  const auto prepared = prepare(chain(9, 0, [](Index i) { return 3.0 + (i * 5) % 7; }));
  FactorOptions options;
  options.keep_factor = true;
  const Factorization f = prepared.factor(0, options);
  int fooled = 0;
  for (int document = 0; document < kDocuments; ++document) {
    RiskBudget risk(kRisk);
    bool passed = false;
    for (int attempt = 0; attempt < kAttempts && !passed; ++attempt) {
      auto result = certify_relative(prepared.analysis, prepared.shifted(0), f, risk,
                                     static_cast<std::uint64_t>(document) + 1000, *prepared.pool);
      ASSERT_TRUE(result.ok());
      passed = result->certified;
    }
    fooled += passed;
  }
  EXPECT_LE(fooled, kDocuments * kRisk + 5 * std::sqrt(kDocuments * kRisk * (1 - kRisk)));
  EXPECT_GT(fooled, 0) << "at this risk chance must get through now and then, or the test shows nothing";
}

TEST(HardCases, ProductsOfSubnormalNumbersDoNotTurnASign) {
  // 0.4 times the least subnormal number rounds to zero, so that -1 + 3 * 0.4 of them is formed as -1: all of
  // it is rounding, whatever the scale makes of it.
  constexpr double kLeast = 0x1p-1074;
  const SymmetricMatrix first = from_triplets(1, {{0, 0, -kLeast}}),
                        more = from_triplets(1, {{0, 0, kLeast}});
  auto prepared = prepare(first);
  const std::vector<const SymmetricMatrix*> members{&first, &more, &more, &more};
  prepared.family = unite(members);
  const ShiftedMatrix matrix{&prepared.family, {1, 0.4, 0.4, 0.4}, &prepared.scale, 0};
  for (const bool single : {false, true}) {
    RiskBudget risk(1e-6);
    CertifyOptions options;
    options.risk = &risk;
    options.most_factor_bytes = Offset{1} << 40;
    options.single = single ? SingleUse::kOnly : SingleUse::kNever;
    const auto found = certify_inertia(prepared.analysis, matrix, options, *prepared.pool);
    ASSERT_TRUE(found.ok()) << found.status().to_string();
    EXPECT_TRUE(allows(*found, 0, 1))
        << "single " << single << ": " << found->inertia.negative << " negative";
  }
}

TEST(HardCases, PenaltySpringsFromAHundredToATrillionAreSettledBeyondThatNothingWrongIsSaid) {
  for (int power = 2; power <= 18; ++power) {
    const double penalty = std::pow(10.0, power);
    const auto prepared = prepare(chain(200, 1, [&](Index i) { return i % 17 == 0 ? penalty : 1.0; }));
    const auto found = certify(prepared, true);
    EXPECT_TRUE(allows(found, 0, 200)) << "10^" << power;
    if (power <= 12) {
      EXPECT_EQ(found.inertia.positive, 200) << "10^" << power;
    }
  }
}

TEST(HardCases, MechanismHeldByWeakSpringsIsDefinite) {
  for (const double weak : {1e-6, 1e-9}) {
    const auto found = certify(prepare(chain(300, weak, [](Index) { return 1.0; })), true);
    EXPECT_EQ(found.inertia.positive, 300) << weak;
  }
}

TEST(HardCases, AColumnOfAHundredThousandElementsIsNotCertifiedInDouble) {
  auto specimen = make_specimen("column", 300'000);
  ASSERT_TRUE(specimen.ok());
  const auto prepared = prepare(specimen->stiffness, 2);
  FactorOptions options;
  options.keep_factor = true;
  const Factorization f = prepared.factor(0, options);
  RiskBudget risk(1e-6);
  const auto result = certify_relative(prepared.analysis, prepared.shifted(0), f, risk, 1, *prepared.pool);
  ASSERT_TRUE(result.ok());
  EXPECT_FALSE(result->certified) << "bound " << result->relative_bound;
}

TEST(HardCases, GluedChainsHaveTheirPairsToldApartOrLeftOpen) {
  // Two equal fixed-fixed chains, mass points joined one by one by springs of stiffness e / 2 taken off the
  // diagonal: [A e I; e I A] has eigenvalues lambda_k -+ e (closed form), lambda_k = 4 sin^2(k pi / (2 (n +
  // 1))).
  const Index n = 40;
  for (int power = 4; power <= 12; ++power) {
    const double glue = std::pow(10.0, -power);
    for (const Index k : {1, 20, 40}) {
      const double shift = 4 * std::pow(std::sin(k * M_PI / (2.0 * (n + 1))), 2);
      std::vector<Triplet> entries;
      for (Index copy = 0; copy < 2; ++copy) {
        for (Index i = 0; i < n; ++i) {
          entries.push_back({copy * n + i, copy * n + i, 2 - shift});
          if (i > 0) entries.push_back({copy * n + i, copy * n + i - 1, -1});
        }
      }
      for (Index i = 0; i < n; ++i) entries.push_back({n + i, i, glue});
      const auto found = certify(prepare(from_triplets(2 * n, entries)));
      // 2 - shift is rounded, by less than 2^-52: far below the glue.
      EXPECT_TRUE(allows(found, 2 * k - 1, 2 * n)) << "10^-" << power << ", " << k;
      if (power <= 9) {
        EXPECT_EQ(found.inertia.negative, 2 * k - 1) << "10^-" << power << ", " << k;
      }
    }
  }
}

TEST(HardCases, WilkinsonsClosePairIsToldApartOrLeftOpen) {
  // W21+ (Wilkinson, The Algebraic Eigenvalue Problem, 1965, p. 308): the two largest eigenvalues are
  // 10.7461941829033218 and 10.7461941829033934.
  for (const double shift : {10.7461941829033576, 10.7461941829, 10.746194183, 0.2538058170, 0.0}) {
    std::vector<Triplet> entries;
    for (Index i = 0; i < 21; ++i) {
      entries.push_back({i, i, std::fabs(10.0 - i) - shift});
      if (i > 0) entries.push_back({i, i - 1, 1});
    }
    const Index below = shift > 10.7461941829034    ? 21
                        : shift > 10.74619418290335 ? 20
                        : shift > 10                ? 19
                        : shift > 0                 ? 1
                                                    : 1;
    EXPECT_TRUE(allows(certify(prepare(from_triplets(21, entries))), below, 21)) << shift;
  }
}

TEST(HardCases, SinglePrecisionStorageCertifiesItselfOrNothing) {
  // L rounded to float where it is stored is only another M: the statement stays as strong.
  for (const double shift : {0.0, 0.7, 5.9}) {
    const auto prepared = prepare(test::laplacian(13, 12, 11, shift), 2);
    FactorOptions options;
    options.keep_factor = true;
    const Factorization in_double = prepared.factor(0, options);
    options.store_single = true;
    const Factorization in_single = prepared.factor(0, options);
    EXPECT_EQ(in_single.signs.negative, in_double.signs.negative);
    RiskBudget risk(1e-6);
    const auto result =
        certify_relative(prepared.analysis, prepared.shifted(0), in_single, risk, 3, *prepared.pool);
    ASSERT_TRUE(result.ok());
    EXPECT_TRUE(result->certified) << result->relative_bound;
    EXPECT_EQ(result->negative, in_double.signs.negative);
    EXPECT_GT(result->relative_bound, 1e-8) << "the rounding to float must show";
  }
}

TEST(HardCases, ExclusionRadiusHoldsNoEigenvalue) {
  // A - s I for the chain: the nearest closed-form eigenvalue is farther than the radius, and not absurdly
  // so.
  const Index n = 30;
  const SymmetricMatrix stiffness = chain(n, 1, [](Index) { return 1.0; });
  std::vector<Triplet> ones;
  for (Index i = 0; i < n; ++i) ones.push_back({i, i, 1});
  const SymmetricMatrix unit = from_triplets(n, ones);
  auto prepared = prepare(stiffness);
  const std::array<const SymmetricMatrix*, 2> members{&stiffness, &unit};
  prepared.family = permute(unite(members), prepared.analysis.tree.position_of);
  for (const double shift : {0.05, 0.9, 2.2}) {
    const ShiftedMatrix matrix{&prepared.family, {1.0, -shift}, &prepared.scale, 0};
    const ShiftedMatrix second{&prepared.family, {0.0, 1.0}, &prepared.scale, 0};
    FactorOptions options;
    options.keep_factor = true;
    auto f = factorize(prepared.analysis, matrix, options, *prepared.pool);
    ASSERT_TRUE(f.ok());
    RiskBudget risk(1e-6);
    const auto result = certify_relative(prepared.analysis, matrix, *f, risk, 5, *prepared.pool, &second);
    ASSERT_TRUE(result.ok() && result->certified);
    double nearest = 10;  // fixed-free chain: 4 sin^2((2k - 1) pi / (2 (2n + 1))) (closed form)
    for (Index k = 1; k <= n; ++k) {
      nearest = std::min(
          nearest, std::fabs(4 * std::pow(std::sin((2 * k - 1) * M_PI / (2.0 * (2 * n + 1))), 2) - shift));
    }
    EXPECT_GT(result->exclusion_radius, nearest / 1000);
    EXPECT_LT(result->exclusion_radius, nearest);
  }
}

}  // namespace
}  // namespace stanchion
