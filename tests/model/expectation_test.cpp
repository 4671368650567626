#include "model/expectation.hpp"

#include <gtest/gtest.h>

namespace stanchion {
namespace {

using Kind = Expectation::Kind;

CheckOutcome check_with(Inertia inertia) {
  CheckOutcome check;
  check.inertia = inertia;
  check.certificate.level = Level::kProved;
  return check;
}

TEST(Expectation, ParsesItsThreeForms) {
  const auto definite = parse_expectation("positive-definite");
  ASSERT_TRUE(definite.ok());
  EXPECT_EQ(definite->kind, Kind::kPositiveDefinite);
  const auto zero = parse_expectation("zero:6");
  ASSERT_TRUE(zero.ok());
  EXPECT_EQ(zero->kind, Kind::kZero);
  EXPECT_EQ(zero->count, 6);
  const auto negative = parse_expectation("negative:0");
  ASSERT_TRUE(negative.ok());
  EXPECT_EQ(negative->kind, Kind::kNegative);
  EXPECT_EQ(negative->count, 0);
}

TEST(Expectation, BracketsAndAuditsHaveOneEach) {
  const auto none = parse_expectation("none-below"), complete = parse_expectation("complete");
  ASSERT_TRUE(none.ok() && complete.ok());
  EXPECT_TRUE(check_applicable(*none, Question::kBracket).ok());
  EXPECT_TRUE(check_applicable(*complete, Question::kAudit).ok());
  for (const Question question : {Question::kCheck, Question::kCount, Question::kSweep, Question::kAudit}) {
    EXPECT_FALSE(check_applicable(*none, question).ok());
  }
  for (const Question question : {Question::kCheck, Question::kCount, Question::kSweep, Question::kBracket}) {
    EXPECT_FALSE(check_applicable(*complete, question).ok());
  }
  BracketOutcome bracket;
  EXPECT_EQ(compare(*none, bracket), Comparison::kOpen);
  bracket.none_below = true;
  EXPECT_EQ(compare(*none, bracket), Comparison::kMet);
  bracket.none_below = false;
  EXPECT_EQ(compare(*none, bracket), Comparison::kNotMet);
  AuditOutcome audit;
  EXPECT_EQ(compare(*complete, audit), Comparison::kOpen);
  audit.verdict = AuditVerdict::kComplete;
  EXPECT_EQ(compare(*complete, audit), Comparison::kMet);
  audit.verdict = AuditVerdict::kMissingAndSurplus;
  EXPECT_EQ(compare(*complete, audit), Comparison::kNotMet);
}

TEST(Expectation, RefusesAnythingElse) {
  for (const char* text :
       {"", "zero", "zero:", "zero:-1", "zero:6x", "zero: 6", "negative:99999999999", "positive-definite:1",
        "Positive-Definite", "none-below:1", "complete:", "none below", "zero:1.5"}) {
    const auto parsed = parse_expectation(text);
    ASSERT_FALSE(parsed.ok()) << text;
    EXPECT_EQ(parsed.status().code(), "bad-expectation");
  }
}

TEST(Expectation, OnlyApplicableQuestions) {
  EXPECT_TRUE(check_applicable({Kind::kZero, 6}, Question::kCheck).ok());
  EXPECT_FALSE(check_applicable({Kind::kZero, 6}, Question::kCount).ok());
  EXPECT_TRUE(check_applicable({Kind::kNegative, 2}, Question::kCount).ok());
  EXPECT_FALSE(check_applicable({Kind::kPositiveDefinite, 0}, Question::kForecast).ok());
}

TEST(Expectation, ZeroMeansSemidefiniteWithThatNullity) {
  EXPECT_EQ(compare({Kind::kZero, 6}, check_with({0, 6, 10, 0})), Comparison::kMet);
  EXPECT_EQ(compare({Kind::kZero, 6}, check_with({0, 7, 9, 0})), Comparison::kNotMet);
  EXPECT_EQ(compare({Kind::kZero, 6}, check_with({1, 6, 9, 0})), Comparison::kNotMet);
  EXPECT_EQ(compare({Kind::kZero, 6}, check_with({0, 5, 10, 1})), Comparison::kOpen);
  EXPECT_EQ(compare({Kind::kZero, 6}, check_with({0, 7, 8, 1})), Comparison::kNotMet);
}

TEST(Expectation, NegativeCountsNegativeDirections) {
  EXPECT_EQ(compare({Kind::kNegative, 2}, check_with({2, 1, 10, 0})), Comparison::kMet);
  EXPECT_EQ(compare({Kind::kNegative, 2}, check_with({3, 0, 10, 0})), Comparison::kNotMet);
  EXPECT_EQ(compare({Kind::kNegative, 2}, check_with({1, 0, 10, 2})), Comparison::kOpen);
  EXPECT_EQ(compare({Kind::kNegative, 2}, check_with({2, 0, 10, 1})), Comparison::kOpen);
}

TEST(Expectation, NothingIsMetWithoutCertificate) {
  CheckOutcome check = check_with({0, 0, 10, 0});
  check.certificate.level = Level::kNone;
  EXPECT_EQ(compare({Kind::kPositiveDefinite, 0}, check), Comparison::kOpen);
}

TEST(Expectation, RoundingThatCouldChangeTheVerdictLeavesItOpen) {
  CheckOutcome check = check_with({0, 0, 10, 0});
  check.verdict = Verdict::kPositiveDefinite;
  check.verdict_for_digits = Verdict::kUnresolved;
  EXPECT_EQ(compare({Kind::kPositiveDefinite, 0}, check), Comparison::kOpen);
  check.verdict_for_digits = Verdict::kPositiveDefinite;
  EXPECT_EQ(compare({Kind::kPositiveDefinite, 0}, check), Comparison::kMet);
}

TEST(Expectation, WithMultipliersTheConstrainedStructureIsMeant) {
  CheckOutcome check = check_with({3, 0, 10, 0});  // three multipliers, so the bordered matrix is indefinite
  check.constrained.emplace();
  check.constrained->inertia = Inertia{0, 0, 7, 0};
  EXPECT_EQ(compare({Kind::kPositiveDefinite, 0}, check), Comparison::kMet);
  check.constrained->inertia.reset();
  check.constrained->negative_range = {1, 2};
  EXPECT_EQ(compare({Kind::kPositiveDefinite, 0}, check), Comparison::kNotMet);
  EXPECT_EQ(compare({Kind::kNegative, 2}, check), Comparison::kOpen);
  check.constrained->negative_range = {0, 0};
  EXPECT_EQ(compare({Kind::kPositiveDefinite, 0}, check), Comparison::kOpen);
  EXPECT_EQ(compare({Kind::kNegative, 0}, check), Comparison::kMet);
}

TEST(Expectation, OneRefutedShiftRefutesACount) {
  CountOutcome count;
  ShiftCount known, unknown;
  known.below = 5;
  known.level = Level::kProved;
  unknown.below_range = {0, 9};
  count.counts = {unknown, known};
  EXPECT_EQ(compare({Kind::kNegative, 2}, count), Comparison::kNotMet);
  EXPECT_EQ(compare({Kind::kNegative, 5}, count), Comparison::kOpen);
  count.counts = {known};
  EXPECT_EQ(compare({Kind::kNegative, 5}, count), Comparison::kMet);
  EXPECT_EQ(compare({Kind::kPositiveDefinite, 0}, count), Comparison::kNotMet);
}

}  // namespace
}  // namespace stanchion
