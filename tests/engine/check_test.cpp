#include <cmath>

#include "engine/model_files.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using namespace test;

TEST(Check, HeldChainIsDefiniteWithABoundBelowTheClosedForm) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(50, 2));
  const Outcome outcome = answer(run_check(request, {}));
  ASSERT_TRUE(outcome.check);
  EXPECT_EQ(outcome.check->verdict, Verdict::kPositiveDefinite);
  EXPECT_EQ(outcome.check->certificate.level, Level::kProved);
  EXPECT_EQ(outcome.check->inertia.positive, 50);
  EXPECT_EQ(outcome.work.factorizations, 1);
  // lambda_min = 4 sin^2(pi / (2 * 51)) (closed form).
  const double smallest = 4 * std::pow(std::sin(M_PI / 102), 2);
  EXPECT_LE(*outcome.check->certificate.smallest_eigenvalue_of_k_above, smallest);
  EXPECT_GT(*outcome.check->certificate.smallest_eigenvalue_of_k_above, 0);
  EXPECT_FALSE(outcome.not_checked.empty());
}

TEST(Check, FreeChainHasOneZeroDirectionAtTheResolutionAndTheLastResortIsOffered) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(40, 0));
  const Outcome outcome = answer(run_check(request, {}));
  EXPECT_EQ(outcome.check->verdict, Verdict::kPositiveSemidefinite);
  EXPECT_EQ(outcome.check->inertia.zero, 1);
  EXPECT_TRUE(outcome.check->certificate.resolution);
  EXPECT_TRUE(warned(outcome, "last-resort"));
}

TEST(Check, ExtendedPrecisionTellsWhatDoubleCannot) {
  // A free chain held by a spring of 2^-60: definite, smallest eigenvalue about 2^-60 / 40, far below
  // double's reach in the entry 1 + 2^-60; so the spring is a row of its own, coupled exactly.
  std::vector<Triplet> entries;
  const double soft = std::ldexp(1.0, -70);
  for (Index i = 1; i < 40; ++i)
    entries.insert(entries.end(), {{i, i, 1}, {i - 1, i - 1, 1}, {i, i - 1, -1}});
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", from_triplets(40, entries));
  request.input.added = {{files.matrix("S.mtx", diagonal([] {
                                         std::vector<double> d(40, 0.0);
                                         d[0] = 1;
                                         return d;
                                       }())),
                          soft}};
  const Outcome in_double = answer(run_check(request, {}));
  EXPECT_EQ(in_double.check->verdict, Verdict::kPositiveSemidefinite);
  request.precision = Precision::kExtended;
  const Outcome extended = answer(run_check(request, {}));
  EXPECT_EQ(extended.check->verdict, Verdict::kPositiveDefinite);
  EXPECT_EQ(extended.check->certificate.precision, "extended");
  EXPECT_EQ(extended.check->certificate.level, Level::kProved);
}

TEST(Check, DigitsWidenTheErrorUntilNothingIsCertain) {
  ModelFiles files;
  Request request;
  request.input.stiffness =
      files.matrix("K.mtx", spring_chain(60, 2));  // lambda_min / lambda_max is about 7e-4
  request.digits = 12;
  EXPECT_EQ(*answer(run_check(request, {})).check->verdict_for_digits, Verdict::kPositiveDefinite);
  request.digits = 3;
  const Outcome outcome = answer(run_check(request, {}));
  EXPECT_EQ(outcome.check->verdict, Verdict::kPositiveDefinite);
  EXPECT_NE(*outcome.check->verdict_for_digits, Verdict::kPositiveDefinite);
}

TEST(Check, WitnessIsNegativeWhenEvaluatedAgain) {
  ModelFiles files;
  const SymmetricMatrix matrix = laplacian(6, 5, 4, 1.9);
  Request request;
  request.input.stiffness = files.matrix("K.mtx", matrix);
  request.want_witness = true;
  const Outcome outcome = answer(run_check(request, {}));
  EXPECT_EQ(outcome.check->verdict, Verdict::kIndefinite);
  ASSERT_TRUE(outcome.check->witness);
  const auto& x = outcome.check->witness->x;
  long double form = 0;
  for (Index j = 0; j < matrix.rows; ++j) {
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      const Index i = matrix.row[k];
      form += (i == j ? 1.0L : 2.0L) * matrix.value[k] * x[static_cast<std::size_t>(i)] *
              x[static_cast<std::size_t>(j)];
    }
  }
  EXPECT_LT(form, 0);
  EXPECT_NEAR(static_cast<double>(form), outcome.check->witness->quadratic_form,
              outcome.check->witness->error_bound);
}

TEST(Check, SameAnswerToTheLastBitForAnyNumberOfThreads) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", laplacian(26, 25, 24, 0.9));
  request.threads = 1;
  const Outcome one = answer(run_check(request, {}));
  request.threads = 3;
  const Outcome three = answer(run_check(request, {}));
  EXPECT_EQ(one.check->inertia.negative, three.check->inertia.negative);
  EXPECT_EQ(one.check->certificate.error_bound, three.check->certificate.error_bound);
  EXPECT_EQ(one.check->certificate.relative_bound, three.check->certificate.relative_bound);
  EXPECT_EQ(one.risk, three.risk);
}

TEST(Check, CapBelowTheForecastIsRefusedWithTheFigure) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", laplacian(20, 20, 20));
  request.memory_cap_bytes = 1 << 20;
  const auto result = run_check(request, {});
  ASSERT_FALSE(result.ok());
  EXPECT_EQ(result.status().kind(), StatusKind::kResourceLimit);
  EXPECT_NE(result.status().message().find("MiB"), std::string::npos);
}

TEST(Check, StruckEquationsLeaveTheRest) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(10, 0));
  request.input.fix = files.text("fix.txt", "1\n");
  const Outcome outcome = answer(run_check(request, {}));
  EXPECT_EQ(outcome.rows_struck, 1);
  EXPECT_EQ(outcome.rows_analysed, 9);
  EXPECT_EQ(outcome.check->verdict, Verdict::kPositiveDefinite);
}

}  // namespace
}  // namespace stanchion
