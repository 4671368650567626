#include "spectrum/staircase.hpp"

#include <gtest/gtest.h>

namespace stanchion {
namespace {

CountFact exact(double shift, Offset count) {
  return {shift, count, count, std::nullopt, Level::kProved, 0};
}

TEST(Staircase, JumpsOfTheWorkedExample) {
  // Values 1, 2, 2, 5.
  Staircase stairs;
  for (const CountFact& fact : {exact(4, 3), exact(0, 0), exact(1.5, 1), exact(3, 3)}) stairs.add(fact);
  const auto jumps = stairs.jumps();
  ASSERT_EQ(jumps.size(), 2u);
  EXPECT_EQ(jumps[0].low, 0);
  EXPECT_EQ(jumps[0].high, 1.5);
  EXPECT_EQ(jumps[0].count, 1);
  EXPECT_EQ(jumps[1].low, 1.5);
  EXPECT_EQ(jumps[1].high, 3);
  EXPECT_EQ(jumps[1].count, 2);
  const auto third = stairs.bracket(3);
  ASSERT_TRUE(third);
  EXPECT_EQ(third->low, 1.5);
  EXPECT_EQ(third->high, 3);
  EXPECT_FALSE(stairs.bracket(4));
  EXPECT_TRUE(stairs.contradictions().empty());
}

TEST(Staircase, ABandAroundAShiftOnAValueIsABracket) {
  Staircase stairs;
  stairs.add(exact(0, 0));
  stairs.add({2, 1, 3, std::pair{1.999, 2.001}, Level::kProved, 0});
  stairs.add(exact(3, 3));
  EXPECT_EQ(stairs.bracket(1)->high, 2);
  EXPECT_EQ(stairs.bracket(2)->low, 1.999);
  EXPECT_EQ(stairs.bracket(3)->high, 2.001);
  const auto jumps = stairs.jumps();
  ASSERT_EQ(jumps.size(), 2u);
  EXPECT_EQ(jumps[1].count, 2);
  EXPECT_TRUE(stairs.splits(1e-3, 0).empty());  // one value below 2, two in the band: nothing more to tell
}

TEST(Staircase, FewerBelowALargerShiftIsAContradiction) {
  Staircase stairs;
  stairs.add(exact(1, 2));
  stairs.add(exact(2, 1));
  const auto found = stairs.contradictions();
  ASSERT_EQ(found.size(), 1u);
  EXPECT_EQ(found[0].shift, 1);
  EXPECT_EQ(found[0].other_shift, 2);
  EXPECT_EQ(found[0].least, 2);
  EXPECT_EQ(found[0].most, 1);
}

TEST(Staircase, ABandContradictsToo) {
  Staircase stairs;
  stairs.add({2, 1, 3, std::pair{1.9, 2.1}, Level::kProved, 0});
  stairs.add(exact(2.05, 3));  // fits: n(2.1) >= 3, n(1.9) <= 1
  EXPECT_TRUE(stairs.contradictions().empty());
  stairs.add(exact(2.2, 2));  // fewer than n(2.1)
  EXPECT_FALSE(stairs.contradictions().empty());
}

TEST(Staircase, TwoCountsAtOneShiftMustAgree) {
  Staircase stairs;
  stairs.add(exact(1, 2));
  stairs.add(exact(1, 2));
  EXPECT_TRUE(stairs.contradictions().empty());
  stairs.add(exact(1, 3));
  EXPECT_FALSE(stairs.contradictions().empty());
}

TEST(Staircase, SplitsWhereMoreThanOneValueLies) {
  Staircase stairs;
  for (const CountFact& fact : {exact(0, 0), exact(1, 1), exact(2, 4)}) stairs.add(fact);
  EXPECT_EQ(stairs.splits(1e-3, 0), std::vector<double>{1.5});
  EXPECT_TRUE(stairs.splits(0.6, 0).empty());
  EXPECT_TRUE(stairs.splits(1e-3, 2).empty());
}

TEST(Staircase, WhatRestsOnStatisticsSaysSo) {
  Staircase stairs;
  stairs.add(exact(0, 0));
  stairs.add({1, 1, 1, std::nullopt, Level::kStatistical, 1e-7});
  stairs.add({2, 2, 2, std::nullopt, Level::kStatistical, 2e-7});
  EXPECT_EQ(stairs.bracket(1)->level, Level::kStatistical);
  EXPECT_DOUBLE_EQ(stairs.bracket(2)->failure_probability, 3e-7);
}

}  // namespace
}  // namespace stanchion
