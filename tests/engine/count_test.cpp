#include <cmath>

#include "engine/model_files.hpp"

namespace stanchion {
namespace {

using namespace test;

/// Fixed-fixed chain of n: 4 sin^2(k pi / (2 (n + 1))), k = 1..n (closed form).
double chain_eigenvalue(Index n, Index k) {
  return 4 * std::pow(std::sin(k * M_PI / (2.0 * (n + 1))), 2);
}

Request chain_count(ModelFiles& files, Index n, std::vector<double> shifts) {
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(n, 2));
  request.shifts = std::move(shifts);
  return request;
}

TEST(Count, EigenvaluesOfKBelowShifts) {
  ModelFiles files;
  const Index n = 60;
  std::vector<double> shifts;
  for (const Index k : {0, 1, 7, 30, 59, 60}) {
    shifts.push_back(k == 60 ? 5
                             : (k == 0 ? 1e-4 : (chain_eigenvalue(n, k) + chain_eigenvalue(n, k + 1)) / 2));
  }
  const Outcome outcome = answer(run_count(chain_count(files, n, shifts), {}));
  const Index expected[] = {0, 1, 7, 30, 59, 60};
  for (std::size_t s = 0; s < shifts.size(); ++s) {
    EXPECT_EQ(outcome.count->counts[s].below, expected[s]) << shifts[s];
    EXPECT_NE(outcome.count->counts[s].level, Level::kNone);
  }
}

TEST(Count, AShiftOnAnEigenvalueIsFoundOutAndTheBandHoldsIt) {
  ModelFiles files;
  // n = 5, k = 3: 4 sin^2(pi / 4) = 2 exactly; K - 2 I is singular in exact arithmetic.
  const Outcome outcome = answer(run_count(chain_count(files, 5, {2.0}), {}));
  const ShiftCount& count = outcome.count->counts.front();
  EXPECT_FALSE(count.below);
  EXPECT_EQ(count.below_range, (std::pair<Index, Index>{2, 3}));
  ASSERT_TRUE(count.holds_outside);
  EXPECT_LT(count.holds_outside->first, 2);
  EXPECT_GT(count.holds_outside->second, 2);
  EXPECT_LT(count.holds_outside->second - count.holds_outside->first, 1e-9);
  EXPECT_TRUE(warned(outcome, "shift-at-eigenvalue"));
}

TEST(Count, NeighboursOfAnEigenvalueAreToldApart) {
  ModelFiles files;
  const double next = std::nextafter(2.0, 3.0);
  const Outcome outcome = answer(run_count(chain_count(files, 5, {2.0 - 1e-6, 2.0 + 1e-6, next}), {}));
  EXPECT_EQ(outcome.count->counts[0].below, 2);
  EXPECT_EQ(outcome.count->counts[1].below, 3);
  // One unit in the last place away double precision may not know; if it says a number it must be 3.
  EXPECT_EQ(outcome.count->counts[2].below.value_or(3), 3);
}

TEST(Count, CriticalFactorsOfAChainUnderItsOwnMatrix) {
  // K + f G with G = -I: critical factors are the eigenvalues of K.
  ModelFiles files;
  Request request = chain_count(files, 30, {0.5 * chain_eigenvalue(30, 1), 1.0, -3.0});
  request.pencil = Pencil::kGeometric;
  request.input.geometric = files.matrix("G.mtx", diagonal(std::vector<double>(30, -1.0)));
  const Outcome outcome = answer(run_count(request, {}));
  Index below_one = 0;
  for (Index k = 1; k <= 30; ++k) below_one += chain_eigenvalue(30, k) < 1;
  EXPECT_EQ(outcome.count->counts[0].below, 0);
  EXPECT_EQ(outcome.count->counts[1].below, below_one);
  EXPECT_EQ(outcome.count->counts[2].below, 0);
  bool convex = false;
  for (const std::string& sentence : outcome.count->sentences)
    convex |= sentence.find("convexity") != std::string::npos;
  EXPECT_TRUE(convex);
}

TEST(Count, AWrongSignOfGDoesNotReadAsSafe) {
  ModelFiles files;
  Request request = chain_count(files, 30, {1.0});
  request.pencil = Pencil::kGeometric;
  request.input.geometric = files.matrix("G.mtx", diagonal(std::vector<double>(30, 1.0)));
  const Outcome wrong = answer(run_count(request, {}));
  EXPECT_EQ(wrong.count->counts[0].below, 0);
  EXPECT_TRUE(warned(wrong, "factors-on-the-other-side"));
  request.input.load_sign_minus = true;
  const Outcome right = answer(run_count(request, {}));
  EXPECT_GT(*right.count->counts[0].below, 0);
}

TEST(Count, IndefiniteKGivesNoCountOfFactors) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", diagonal({-1, 2, 3}));
  request.input.geometric = files.matrix("G.mtx", diagonal({-1, -1, -1}));
  request.pencil = Pencil::kGeometric;
  request.shifts = {0.5};
  const Outcome outcome = answer(run_count(request, {}));
  EXPECT_TRUE(warned(outcome, "stiffness-not-definite"));
  EXPECT_NE(outcome.count->counts[0].meaning.find("negative directions"), std::string::npos);
}

TEST(Count, FrequenciesWithMasslessDofs) {
  // Two masses 1 and 4 on a held chain whose middle dof has none: condensed by hand, K = [1.5 -.5; -.5 .5].
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", spring_chain(3, 1));
  request.input.mass = files.matrix("M.mtx", diagonal({1, 0, 4}));
  request.pencil = Pencil::kMass;
  // s^2 - (1.5 + .125) s + (.75 - .25) / 4 = 0: s = 0.08095..., 1.54404... (by hand)
  const double root = std::sqrt(1.625 * 1.625 - 0.5);
  const double low = (1.625 - root) / 2, high = (1.625 + root) / 2;
  request.shifts = {low * 0.999, low * 1.001, high * 0.999, high * 1.001, 1e6};
  const Outcome outcome = answer(run_count(request, {}));
  const Index expected[] = {0, 1, 1, 2, 2};
  for (std::size_t s = 0; s < 5; ++s) EXPECT_EQ(outcome.count->counts[s].below, expected[s]) << s;
  EXPECT_NE(outcome.count->counts[0].meaning.find("strictly below"), std::string::npos);
}

TEST(Count, AFreeBodyWhoseMassHasNullVectorsOfItsOwnIsCountedFromBelowZero) {
  // Three dofs in a free chain, one mass that moves with u1 + u2, one with u3: det(K - s M) = -5 s (1 - s)
  // (by hand), so the values are 0, 1 and an infinite one. M is singular, but no row of it is empty.
  ModelFiles files;
  Request request;
  request.input.stiffness =
      files.matrix("K.mtx", from_triplets(3, {{0, 0, 1}, {1, 0, -1}, {1, 1, 2}, {2, 1, -1}, {2, 2, 1}}));
  request.input.mass = files.matrix("M.mtx", from_triplets(3, {{0, 0, 1}, {1, 0, 1}, {1, 1, 1}, {2, 2, 1}}));
  request.pencil = Pencil::kMass;
  request.shifts = {1e-3, 0.999, 1.001, 1e6};
  const Outcome outcome = answer(run_count(request, {}));
  const Index expected[] = {1, 1, 2, 2};
  for (std::size_t s = 0; s < 4; ++s) {
    const ShiftCount& count = outcome.count->counts[s];
    EXPECT_EQ(count.below, expected[s]) << s;
    EXPECT_NE(count.meaning.find("above -1e-0"), std::string::npos) << count.meaning;
    EXPECT_NE(count.meaning.find("strictly below the shift"), std::string::npos);
    EXPECT_EQ(count.level, Level::kProved);
  }
  EXPECT_TRUE(warned(outcome, "mass-not-definite"));

  // At a value only a band is known, and the value is in it; far below the origin nothing is said of values.
  request.shifts = {1.0, -1.0};
  const Outcome at = answer(run_count(request, {}));
  const ShiftCount& near = at.count->counts[0];
  EXPECT_EQ(near.below_range, (std::pair<Index, Index>{1, 2}));
  ASSERT_TRUE(near.holds_outside);
  EXPECT_LE(near.holds_outside->first, 1);
  EXPECT_GE(near.holds_outside->second, 1);
  EXPECT_LT(near.holds_outside->second - near.holds_outside->first,
            0.1);  // rests on a bound of 1e-12 on K + tau M
  EXPECT_NE(at.count->counts[1].meaning.find("negative directions"), std::string::npos);
}

TEST(Count, ValuesBelowTheOriginAreNotCounted) {
  // K = [1 -1; -1 1], M = [1 0; 0 -0.5]: det(K - s M) = -s (1 + s) / 2 (by hand), so the values are 0 and -1.
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", from_triplets(2, {{0, 0, 1}, {1, 0, -1}, {1, 1, 1}}));
  request.input.mass = files.matrix("M.mtx", diagonal({1, -0.5}));
  request.pencil = Pencil::kMass;
  request.shifts = {0.5, 100};
  const Outcome outcome = answer(run_count(request, {}));
  for (const ShiftCount& count : outcome.count->counts) {
    EXPECT_EQ(count.below, 1);
    EXPECT_NE(count.meaning.find("above -1e-0"), std::string::npos) << count.meaning;
  }
}

TEST(Count, NoOriginIsFoundWhereKAndMShareANullVector) {
  // Nothing holds u1 - u2, neither a spring nor a mass: K - s M is singular at every s (by hand).
  ModelFiles files;
  Request request;
  const SymmetricMatrix both = from_triplets(3, {{0, 0, 1}, {1, 0, 1}, {1, 1, 1}, {2, 2, 1}});
  request.input.stiffness = files.matrix("K.mtx", both);
  request.input.mass = files.matrix("M.mtx", both);
  request.pencil = Pencil::kMass;
  request.shifts = {0.5};
  const Outcome outcome = answer(run_count(request, {}));
  EXPECT_NE(outcome.count->counts[0].meaning.find("negative directions"), std::string::npos);
  EXPECT_FALSE(outcome.count->counts[0].below);
}

TEST(Count, CommonNullVectorsOfKAndMAreSaid) {
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", diagonal({1, 0, 2}));
  request.input.mass = files.matrix("M.mtx", diagonal({1, 0, 1}));
  request.pencil = Pencil::kMass;
  request.shifts = {0.5};
  const Outcome outcome = answer(run_count(request, {}));
  EXPECT_TRUE(warned(outcome, "massless-and-weightless"));
  EXPECT_FALSE(outcome.count->counts[0].below);
}

TEST(Count, WhereKIsSingularOnMasslessDofsTheInertiaItselfIsReported) {
  // K - s M = diag(1 - s, -1, 0): one negative direction and one zero, whatever s < 1 (by hand).
  ModelFiles files;
  Request request;
  request.input.stiffness = files.matrix("K.mtx", diagonal({1, -1, 0}));
  request.input.mass = files.matrix("M.mtx", diagonal({1, 0, 0}));
  request.pencil = Pencil::kMass;
  request.shifts = {0.5};
  const Outcome outcome = answer(run_count(request, {}));
  const ShiftCount& count = outcome.count->counts[0];
  EXPECT_NE(count.meaning.find("negative directions"), std::string::npos);
  EXPECT_EQ(count.below_range, (std::pair<Index, Index>{1, 2}));
}

TEST(Count, TheDigitsOfKAndMCountForWhatGivesTheNumbersTheirMeaning) {
  ModelFiles files;
  Request request;
  // Definite as written by 1e-6, but not with four digits.
  request.input.stiffness = files.matrix("K.mtx", from_triplets(2, {{0, 0, 1}, {1, 0, 1}, {1, 1, 1 + 1e-6}}));
  request.input.geometric = files.matrix("G.mtx", diagonal({-1, -1}));
  request.pencil = Pencil::kGeometric;
  request.shifts = {1.0};
  EXPECT_FALSE(warned(answer(run_count(request, {})), "stiffness-not-definite"));
  request.digits = 4;
  EXPECT_TRUE(warned(answer(run_count(request, {})), "stiffness-not-definite"));

  Request vibration;
  vibration.input.stiffness = files.matrix("K2.mtx", diagonal({1, 2}));
  vibration.input.mass = files.matrix("M.mtx", from_triplets(2, {{0, 0, 1}, {1, 0, 1}, {1, 1, 1 + 1e-6}}));
  vibration.pencil = Pencil::kMass;
  vibration.shifts = {0.1};
  EXPECT_FALSE(warned(answer(run_count(vibration, {})), "mass-not-definite"));
  vibration.digits = 4;
  EXPECT_TRUE(warned(answer(run_count(vibration, {})), "mass-not-definite"));
}

TEST(Count, ForecastAnswersWithoutFactoring) {
  ModelFiles files;
  Request request = chain_count(files, 200, {});
  const Outcome outcome = answer(run_forecast(request, {}));
  ASSERT_TRUE(outcome.forecast);
  EXPECT_EQ(outcome.work.factorizations, 0);
  EXPECT_EQ(outcome.forecast->factor_entries, 2 * 200 - 1);  // a chain has no fill
  EXPECT_GE(outcome.forecast->peak_bytes_solve, outcome.forecast->peak_bytes_count);
  // Vectors beside the factor: 24 and 16 columns at least, of 200 rows.
  EXPECT_GE(outcome.forecast->peak_bytes_locate - outcome.forecast->peak_bytes_count, 40 * 200 * 8);
}

}  // namespace
}  // namespace stanchion
