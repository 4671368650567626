#include "model/exit_code.hpp"

#include <gtest/gtest.h>

namespace stanchion {
namespace {

Outcome check_outcome(Verdict verdict, Inertia inertia, Level level = Level::kProved) {
  Outcome outcome;
  outcome.check.emplace();
  outcome.check->verdict = verdict;
  outcome.check->inertia = inertia;
  outcome.check->certificate.level = level;
  return outcome;
}

Outcome count_outcome(std::initializer_list<std::optional<Index>> counts) {
  Outcome outcome;
  outcome.count.emplace();
  for (const auto& below : counts) {
    ShiftCount count;
    count.below = below;
    count.level = below ? Level::kProved : Level::kNone;
    count.below_range = {below.value_or(1), below.value_or(3)};
    outcome.count->counts.push_back(count);
  }
  return outcome;
}

TEST(ExitCode, EveryKindOfFailureHasItsCode) {
  EXPECT_EQ(exit_code(StatusKind::kOk), 0);
  EXPECT_EQ(exit_code(StatusKind::kBadUsage), 2);
  EXPECT_EQ(exit_code(StatusKind::kBadInput), 2);
  EXPECT_EQ(exit_code(StatusKind::kResourceLimit), 4);
  EXPECT_EQ(exit_code(StatusKind::kInternal), 5);
  EXPECT_EQ(exit_code(StatusKind::kInterrupted), 130);
}

TEST(ExitCode, CheckIsGoodOnlyWhenPositiveDefinite) {
  EXPECT_EQ(exit_code(check_outcome(Verdict::kPositiveDefinite, {0, 0, 9, 0}), {}), 0);
  EXPECT_EQ(exit_code(check_outcome(Verdict::kPositiveSemidefinite, {0, 6, 3, 0}), {}), 1);
  EXPECT_EQ(exit_code(check_outcome(Verdict::kNegativeSemidefinite, {3, 6, 0, 0}), {}), 1);
  EXPECT_EQ(exit_code(check_outcome(Verdict::kNegativeDefinite, {9, 0, 0, 0}), {}), 1);
  EXPECT_EQ(exit_code(check_outcome(Verdict::kIndefinite, {2, 0, 7, 0}), {}), 1);
  EXPECT_EQ(exit_code(check_outcome(Verdict::kUnresolved, {0, 0, 8, 1}), {}), 3);
}

TEST(ExitCode, AVerdictWithoutCertificateIsUnresolved) {
  EXPECT_EQ(exit_code(check_outcome(Verdict::kPositiveDefinite, {0, 0, 9, 0}, Level::kNone), {}), 3);
  EXPECT_EQ(exit_code(check_outcome(Verdict::kPositiveDefinite, {0, 0, 9, 0}, Level::kStatistical), {}), 0);
}

TEST(ExitCode, RoundingOfTheFileCanSpoilAGoodAnswer) {
  Outcome outcome = check_outcome(Verdict::kPositiveDefinite, {0, 0, 9, 0});
  outcome.check->verdict_for_digits = Verdict::kPositiveDefinite;
  EXPECT_EQ(exit_code(outcome, {}), 0);
  outcome.check->verdict_for_digits = Verdict::kUnresolved;
  EXPECT_EQ(exit_code(outcome, {}), 3);
  outcome.check->verdict_for_digits = Verdict::kPositiveSemidefinite;
  EXPECT_EQ(exit_code(outcome, {}), 1);
}

TEST(ExitCode, SymmetricPartIsNeverGoodByItself) {
  const Judgement part{true, {}};
  EXPECT_EQ(exit_code(check_outcome(Verdict::kPositiveDefinite, {0, 0, 9, 0}), part), 1);
  EXPECT_EQ(exit_code(check_outcome(Verdict::kUnresolved, {0, 0, 8, 1}), part), 3);
  EXPECT_EQ(exit_code(count_outcome({0}), part), 1);
  const Judgement expected{true, Expectation{Expectation::Kind::kPositiveDefinite, 0}};
  EXPECT_EQ(exit_code(check_outcome(Verdict::kPositiveDefinite, {0, 0, 9, 0}), expected), 0);
}

TEST(ExitCode, CountIsGoodWhenEveryShiftIsAnswered) {
  EXPECT_EQ(exit_code(count_outcome({0, 5}), {}), 0);
  EXPECT_EQ(exit_code(count_outcome({0, std::nullopt}), {}), 3);
  Outcome uncertified = count_outcome({4});
  uncertified.count->counts[0].level = Level::kNone;
  EXPECT_EQ(exit_code(uncertified, {}), 3);
}

TEST(ExitCode, CountAgainstAnExpectation) {
  const Judgement two{false, Expectation{Expectation::Kind::kNegative, 2}};
  EXPECT_EQ(exit_code(count_outcome({2, 2}), two), 0);
  EXPECT_EQ(exit_code(count_outcome({2, 3}), two), 1);
  EXPECT_EQ(exit_code(count_outcome({2, std::nullopt}), two), 3);
}

TEST(ExitCode, ForecastIsGoodWhenAnswered) {
  Outcome outcome;
  outcome.forecast.emplace();
  EXPECT_EQ(exit_code(outcome, {}), 0);
}

}  // namespace
}  // namespace stanchion
