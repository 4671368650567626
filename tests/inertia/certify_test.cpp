#include "inertia/certify.hpp"

#include <gtest/gtest.h>

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
  const auto found = certify(prepare(laplacian(36, 35, 34, 0.41), 2), options);
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

TEST(Certify, AskedResolutionIsKept) {
  CertifyOptions options;
  options.offsets.resolution = 1e-3;
  const auto found = certify(prepare(laplacian(6, 7, 8)), options);
  EXPECT_EQ(*found.certificate.resolution, 1e-3);
  options.offsets.resolution = 1e-17;
  const auto below = certify(prepare(laplacian(6, 7, 8)), options);
  EXPECT_EQ(below.certificate.level, Level::kNone);
  EXPECT_FALSE(below.unresolved_because.empty());
  EXPECT_EQ(below.inertia.undecided, 336);
}

}  // namespace
}  // namespace stanchion
