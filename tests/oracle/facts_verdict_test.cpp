// Source: facts.json (dense eigenvalues, exact rational elimination where marked, published metadata of the
// SuiteSparse Matrix Collection). The certified answer of `check` for every matrix of the folder.
#include <gtest/gtest.h>

#include "engine/pipeline.hpp"
#include "oracle/shared_facts.hpp"

namespace stanchion {
namespace {

using test::Signs;

CheckOutcome check(const std::string& path) {
  Request request;
  request.input.stiffness = path;
  request.threads = 2;
  auto outcome = run_check(request, {});
  EXPECT_TRUE(outcome.ok()) << outcome.status().to_string();
  return outcome.ok() ? std::move(*outcome->check) : CheckOutcome{};
}

/// The largest and the smallest that may be claimed: nothing certain may contradict the fact.
TEST(FactsOfVerdicts, EveryMatrixGetsItsKnownInertiaProved) {
  if (!test::shared_data_present()) GTEST_SKIP() << "no shared data beside the project";
  std::vector<std::string> not_exact;
  int matrices = 0;
  for (const auto& fact : test::matrix_facts()) {
    SCOPED_TRACE(fact.name);
    ++matrices;
    const CheckOutcome answer = check(fact.path);
    EXPECT_LE(answer.inertia.negative, fact.inertia[0]);
    EXPECT_LE(answer.inertia.positive, fact.inertia[2]);
    const Signs found{answer.inertia.negative, answer.inertia.zero, answer.inertia.positive};
    if (found != fact.inertia || answer.certificate.level != Level::kProved) not_exact.push_back(fact.name);
  }
  EXPECT_GE(matrices, 36);
  // Names of those whose smallest eigenvalue the resolution cannot tell from zero; none at present.
  EXPECT_EQ(not_exact, std::vector<std::string>{});
}

TEST(FactsOfVerdicts, TheCertificateOfDefiniteOnesHolds) {
  if (!test::shared_data_present()) GTEST_SKIP() << "no shared data beside the project";
  int definite = 0;
  for (const auto& fact : test::matrix_facts()) {
    if (fact.inertia[0] > 0 || fact.inertia[1] > 0 || !fact.gap) continue;
    SCOPED_TRACE(fact.name);
    const CheckOutcome answer = check(fact.path);
    if (answer.verdict != Verdict::kPositiveDefinite) continue;
    ++definite;
    ASSERT_TRUE(answer.certificate.smallest_eigenvalue_of_k_above);
    EXPECT_GT(*answer.certificate.smallest_eigenvalue_of_k_above, 0);
    // Dense eigenvalues carry their own rounding: a part in ten thousand is ample here.
    EXPECT_LE(*answer.certificate.smallest_eigenvalue_of_k_above, *fact.gap * 1.0001);
  }
  EXPECT_GE(definite, 20);
}

}  // namespace
}  // namespace stanchion
