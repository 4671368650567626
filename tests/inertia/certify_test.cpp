#include "inertia/certify.hpp"

#include <gtest/gtest.h>

#include <algorithm>
#include <array>

#include "support/factored.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::laplacian;
using test::prepare;

CertifiedInertia certify(const test::Prepared& prepared, CertifyOptions options) {
  auto result = certify_inertia(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
  EXPECT_TRUE(result.ok()) << result.status().to_string();
  return result.ok() ? std::move(*result) : CertifiedInertia{};
}

TEST(Certify, DefiniteNeedsOneFactorizationAndIsProved) {
  RiskBudget risk(1e-6);
  CertifyOptions options;
  options.offsets.definite_first = true;
  options.risk = &risk;
  options.most_factor_bytes = Offset{1} << 40;
  const auto found = certify(prepare(laplacian(20, 20, 20), 2), options);
  EXPECT_EQ(found.factorizations, 1);
  EXPECT_EQ(found.certificate.level, Level::kProved);
  EXPECT_EQ(found.inertia.positive, 8000);
  EXPECT_EQ(risk.spent(), 0);
  // lambda_min of the Laplacian is 3 * 4 sin^2(pi / 42) = 0.0671 (closed form); scaled by 1/8 or 1/4 here.
  EXPECT_GT(*found.certificate.smallest_eigenvalue_above, 0);
  EXPECT_LT(*found.certificate.smallest_eigenvalue_of_k_above, 0.0671);
}

TEST(Certify, LargeIndefiniteTakesTheRelativeTestAndChargesIt) {
  RiskBudget risk(1e-6);
  CertifyOptions options;
  options.risk = &risk;
  options.most_factor_bytes = Offset{1} << 40;
  const auto found = certify(prepare(laplacian(42, 40, 39, 0.41), 2), options);
  EXPECT_EQ(found.factorizations, 1);
  EXPECT_EQ(found.certificate.level, Level::kStatistical);
  EXPECT_GT(risk.spent(), 0);
  EXPECT_LE(risk.spent(), 1e-6);
}

TEST(Certify, WithoutMemoryForTheFactorTwoOffsetsAnswer) {
  RiskBudget risk(1e-6);
  CertifyOptions options;
  options.risk = &risk;
  options.most_factor_bytes = 1000;
  const auto found = certify(prepare(laplacian(36, 35, 34, 0.41), 2), options);
  EXPECT_EQ(found.certificate.level, Level::kProved);
  EXPECT_GE(found.factorizations, 2);
  EXPECT_EQ(risk.spent(), 0);
}

TEST(Certify, AShiftAmidTheSpectrumStartsFromAnOffsetThatHolds) {
  const SymmetricMatrix box = laplacian(14, 14, 15);
  std::vector<Triplet> ones;
  for (Index i = 0; i < box.rows; ++i) ones.push_back({i, i, 1});
  const SymmetricMatrix identity = from_triplets(box.rows, ones);
  test::Prepared prepared = prepare(box, 2);
  const std::array<const SymmetricMatrix*, 2> members{&box, &identity};
  prepared.family = permute(unite(members), prepared.analysis.tree.position_of);
  ShiftedMatrix shifted = prepared.shifted(0);
  auto spectrum = test::laplacian_spectrum(14, 14, 15);  // closed form
  for (const double shift : {0.51, 2.01, 5.97}) {
    shifted.coefficients = {1, -shift};
    OffsetOptions options;
    options.sharpen = false;  // as in counts of pencils
    const auto found = certify_by_offsets(prepared.analysis, shifted, options, *prepared.pool);
    ASSERT_TRUE(found.ok());
    EXPECT_EQ(found->factorizations, 2) << shift;
    EXPECT_EQ(found->inertia.zero, 0) << shift;
    EXPECT_EQ(found->inertia.negative,
              std::count_if(spectrum.begin(), spectrum.end(), [&](double value) { return value < shift; }));
  }
}

TEST(Certify, SingularEndsAtAResolutionAfterARefusedAttemptThatIsCharged) {
  RiskBudget risk(1e-6);
  CertifyOptions options;
  options.risk = &risk;
  options.most_factor_bytes = Offset{1} << 40;
  const auto found = certify(prepare(laplacian(8, 8, 8, 6)), options);
  EXPECT_EQ(found.certificate.level, Level::kProved);
  EXPECT_GT(found.inertia.zero, 0);
  EXPECT_EQ(risk.attempts(), 1);
}

/// The eigenvalue next above the shift lies 4e-10 from it, below the first offset: the second try tells.
TEST(Certify, ThePositiveSideAloneTakesOneFactorizationOrTwo) {
  std::vector<double> values = test::laplacian_spectrum(31, 23, 1);
  std::sort(values.begin(), values.end());
  for (const double distance : {0.5 * (values[50] - values[49]), 4e-10}) {
    ASSERT_GT(values[50] - values[49], 2 * 4e-10);
    const auto prepared = prepare(laplacian(31, 23, 1, values[50] - distance), 1);
    OffsetOptions options;
    options.all_positive_but = 50;
    const auto found = certify_by_offsets(prepared.analysis, prepared.shifted(0), options, *prepared.pool);
    ASSERT_TRUE(found.ok());
    EXPECT_EQ(found->factorizations, distance > 4e-10 ? 1 : 2);
    EXPECT_EQ(found->certificate.level, Level::kProved);
    EXPECT_EQ(found->inertia.negative + found->inertia.zero, 0);
    EXPECT_EQ(found->inertia.undecided, 50);
    EXPECT_EQ(found->inertia.positive, 31 * 23 - 50);
  }
}

TEST(Certify, TheLikelyWorkIsWhatIsDone) {
  struct Expected {
    SymmetricMatrix matrix;
    bool definite_first;
    Offset factor_bytes;
    Index factorizations;
    bool relative;
  };
  const Offset plenty = Offset{1} << 40;
  Expected cases[] = {{laplacian(20, 20, 20), true, plenty, 1, false},
                      {laplacian(42, 40, 39, 0.41), false, plenty, 1, true},
                      {laplacian(9, 8, 7, 0.5), false, 1000, 2, false},
                      {laplacian(9, 8, 7, 0.5), false, plenty, 2, false}};
  for (const Expected& expected : cases) {
    RiskBudget risk(1e-6);
    CertifyOptions options;
    options.risk = &risk;
    options.most_factor_bytes = expected.factor_bytes;
    options.offsets.definite_first = expected.definite_first;
    const auto prepared = prepare(expected.matrix, 2);
    const LikelyWork likely = likely_work(prepared.analysis, options);
    const auto found = certify(prepared, options);
    EXPECT_EQ(likely.factorizations, expected.factorizations);
    EXPECT_EQ(likely.relative, expected.relative);
    EXPECT_EQ(found.factorizations, likely.factorizations);
    EXPECT_EQ(found.certificate.level == Level::kStatistical, likely.relative);
  }
  // What comes after the likely way: a definite attempt that fails is followed by two offsets, those by the
  // test.
  RiskBudget risk(1e-6);
  CertifyOptions options;
  options.risk = &risk;
  options.most_factor_bytes = plenty;
  options.offsets.definite_first = true;
  const LikelyWork indefinite = likely_work(prepare(laplacian(9, 8, 7, 2.1)).analysis, options);
  EXPECT_EQ(indefinite.more_if_not, 2);
  EXPECT_FALSE(indefinite.relative_if_not);
  options.offsets.definite_first = false;
  const LikelyWork singular = likely_work(prepare(laplacian(8, 8, 8, 6)).analysis, options);
  EXPECT_EQ(singular.more_if_not, 1);
  EXPECT_TRUE(singular.relative_if_not);
}

TEST(Certify, AskedResolutionIsKept) {
  CertifyOptions options;
  options.offsets.resolution = 1e-3;
  const auto found = certify(prepare(laplacian(6, 7, 8)), options);
  EXPECT_EQ(*found.certificate.resolution, 1e-3);
  options.offsets.resolution = 1e-17;
  const auto below = certify(prepare(laplacian(6, 7, 8)), options);
  EXPECT_EQ(below.certificate.level, Level::kNone);
  EXPECT_NE(below.unresolved_because.find("e-1"), std::string::npos) << below.unresolved_because;
  EXPECT_EQ(below.inertia.undecided, 336);
}

}  // namespace
}  // namespace stanchion
