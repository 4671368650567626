#include "model/claims.hpp"

#include <gtest/gtest.h>

namespace stanchion {
namespace {

constexpr Index kRows = 10;

/// A check by two offsets: `negative` and `zero` directions at the resolution `c`, both errors `e`.
Outcome check_of(Index negative, Index zero, double c = 1e-12, double e = 1e-13) {
  Outcome outcome;
  outcome.rows_analysed = kRows;
  outcome.scaling_sha256 = "one scaling";
  CheckOutcome& check = outcome.check.emplace();
  check.inertia = {negative, zero, kRows - negative - zero, 0};
  check.verdict = negative > 0 ? Verdict::kIndefinite
                  : zero > 0   ? Verdict::kPositiveSemidefinite
                               : Verdict::kPositiveDefinite;
  check.certificate.level = Level::kProved;
  check.certificate.method = "offsets";
  check.certificate.resolution = c;
  check.certificate.error_bound = e;
  check.certificate.runs = {{c, negative + zero, e}, {-c, negative, e}};
  return outcome;
}

/// A check by the relative test: signs only.
Outcome relative_check_of(Index negative) {
  Outcome outcome = check_of(negative, 0);
  Certificate& certificate = outcome.check->certificate;
  certificate.level = Level::kStatistical;
  certificate.method = "relative";
  certificate.relative_bound = 1e-3;
  certificate.failure_probability = 1e-6;
  outcome.risk = outcome.risk_allowed = 1e-6;
  outcome.events = {{{}, 1e-6, true}};
  certificate.resolution.reset();
  certificate.error_bound.reset();
  certificate.runs.clear();
  return outcome;
}

Outcome count_of(Index least, Index most) {
  Outcome outcome;
  outcome.rows_analysed = kRows;
  ShiftCount& count = outcome.count.emplace().counts.emplace_back();
  count.shift = 2.5;
  count.meaning = "eigenvalues below the shift";
  count.below_range = {least, most};
  const Outcome relative = relative_check_of(0);
  outcome.risk = outcome.risk_allowed = relative.risk;
  outcome.events = relative.events;
  count.certificate = relative.check->certificate;
  count.method = count.certificate.method;
  if (least == most) {
    count.below = least;
    count.level = count.certificate.level;
    count.failure_probability = count.certificate.failure_probability;
  }
  return outcome;
}

Agreement between(const Outcome& claimed, const Outcome& found) {
  return worst(compare_claims(claimed, found));
}

TEST(Claims, TheSameAnswerAgrees) {
  EXPECT_EQ(between(check_of(2, 1), check_of(2, 1)), Agreement::kAgreed);
  EXPECT_EQ(between(relative_check_of(2), check_of(2, 0)), Agreement::kAgreed);
  EXPECT_EQ(between(check_of(2, 0), relative_check_of(2)), Agreement::kAgreed);
  EXPECT_EQ(between(count_of(3, 3), count_of(3, 3)), Agreement::kAgreed);
}

TEST(Claims, SignsThatExcludeEachOtherContradict) {
  EXPECT_EQ(between(check_of(2, 0), check_of(3, 0)), Agreement::kContradicted);
  EXPECT_EQ(between(check_of(3, 0), check_of(2, 0)), Agreement::kContradicted);
  EXPECT_EQ(between(relative_check_of(1), check_of(2, 3)), Agreement::kContradicted);
  Outcome scaled_otherwise = check_of(3, 0);
  scaled_otherwise.scaling_sha256 = "another scaling";
  EXPECT_EQ(between(check_of(2, 0), scaled_otherwise), Agreement::kContradicted);
}

TEST(Claims, MoreDecidedAgreesLessDecidedDoesNotRepeat) {
  EXPECT_EQ(between(check_of(2, 1, 1e-9, 1e-10), relative_check_of(3)), Agreement::kAgreed);
  EXPECT_EQ(between(relative_check_of(3), check_of(2, 1)), Agreement::kNotRepeated);
  EXPECT_EQ(between(count_of(2, 4), count_of(3, 3)), Agreement::kAgreed);
  EXPECT_EQ(between(count_of(3, 3), count_of(2, 4)), Agreement::kNotRepeated);
}

TEST(Claims, ZeroDirectionsAreHeldAgainstTheResolution) {
  // Seven zero directions within 1e-12, but the seventh eigenvalue exceeds 5e-12.
  EXPECT_EQ(between(check_of(0, 7), check_of(0, 6, 6e-12)), Agreement::kContradicted);
  // Five within 1e-12, yet the sixth lies below 5e-13.
  EXPECT_EQ(between(check_of(0, 5), check_of(0, 6, 4e-13, 1e-14)), Agreement::kContradicted);
  // Offsets too near to each other to tell.
  EXPECT_EQ(between(check_of(0, 5), check_of(0, 6)), Agreement::kNotRepeated);
  Outcome scaled_otherwise = check_of(0, 6, 6e-12);
  scaled_otherwise.scaling_sha256 = "another scaling";
  EXPECT_EQ(between(check_of(0, 7), scaled_otherwise), Agreement::kAgreed);
}

TEST(Claims, TellingResolutionsTell) {
  const Outcome claimed = check_of(0, 7, 1e-12, 1e-13), found = check_of(0, 6, 1e-12, 1e-13);
  const auto resolutions = telling_resolutions(claimed.check->certificate, found.check->certificate);
  ASSERT_EQ(resolutions.size(), 2U);
  EXPECT_EQ(between(claimed, check_of(0, 6, resolutions[0])), Agreement::kContradicted);
  EXPECT_EQ(between(check_of(0, 5), check_of(0, 6, resolutions[1])), Agreement::kContradicted);
  EXPECT_TRUE(telling_resolutions(relative_check_of(1).check->certificate, {}).empty());
}

TEST(Claims, AClaimMayContradictItself) {
  const Outcome truth = check_of(2, 1);
  Outcome wrong_sum = truth;
  wrong_sum.check->inertia.negative = 1;
  EXPECT_EQ(between(wrong_sum, truth), Agreement::kContradicted);
  Outcome wrong_verdict = truth;
  wrong_verdict.check->verdict = Verdict::kPositiveDefinite;
  EXPECT_EQ(between(wrong_verdict, truth), Agreement::kContradicted);
  Outcome not_from_its_runs = truth;
  not_from_its_runs.check->inertia = {2, 2, kRows - 4, 0};
  EXPECT_EQ(between(not_from_its_runs, truth), Agreement::kContradicted);
  Outcome count_beside_its_range = count_of(3, 3);
  count_beside_its_range.count->counts[0].below = 4;
  EXPECT_EQ(between(count_beside_its_range, count_of(3, 3)), Agreement::kContradicted);
}

TEST(Claims, BoundsAreThoseOfTheFactorizations) {
  const Outcome truth = check_of(0, 0);
  const auto altered = [&](auto change) {
    Outcome claimed = truth;
    change(claimed.check->certificate);
    return between(claimed, truth);
  };
  EXPECT_EQ(altered([](Certificate& c) { c.smallest_eigenvalue_above = 8e-13; }), Agreement::kAgreed);
  EXPECT_EQ(altered([](Certificate& c) { c.smallest_eigenvalue_above = 2e-12; }), Agreement::kContradicted);
  EXPECT_EQ(altered([](Certificate& c) { c.smallest_eigenvalue_of_k_above = 1; }), Agreement::kContradicted);
  EXPECT_EQ(altered([](Certificate& c) { c.error_bound = 1e-14; }), Agreement::kContradicted);
  EXPECT_EQ(altered([](Certificate& c) { c.resolution = 2e-12; }), Agreement::kContradicted);
  EXPECT_EQ(altered([](Certificate& c) { c.method = "relative"; }), Agreement::kContradicted);
  EXPECT_EQ(altered([](Certificate& c) { c.runs.clear(); }), Agreement::kContradicted);
  EXPECT_EQ(altered([](Certificate& c) { c.runs.push_back({1e-9, 3, 1e-13}); }), Agreement::kAgreed);
}

TEST(Claims, TheBoundForKItselfFollowsFromTheScaling) {
  Outcome claimed = check_of(0, 0), found = claimed;
  claimed.check->certificate.smallest_eigenvalue_above = 9e-13;
  claimed.check->certificate.smallest_eigenvalue_of_k_above = 9e-9;
  found.check->certificate.smallest_eigenvalue_above = 8e-13;
  found.check->certificate.smallest_eigenvalue_of_k_above = 8e-9;
  EXPECT_EQ(between(claimed, found), Agreement::kAgreed);
  claimed.check->certificate.smallest_eigenvalue_of_k_above = 9.1e-9;
  EXPECT_EQ(between(claimed, found), Agreement::kContradicted);
}

TEST(Claims, FactorizationsAtOneOffsetShouldGiveOneNumber) {
  Outcome claimed = check_of(0, 1), found = claimed;
  claimed.check->certificate.runs.push_back({1e-9, 3, 1e-13});
  found.check->certificate.runs.push_back({1e-9, 2, 1e-13});
  EXPECT_EQ(between(claimed, found), Agreement::kNotRepeated);
}

TEST(Claims, RelativeClaimsNeedABoundBelowOne) {
  Outcome claimed = relative_check_of(2);
  claimed.check->certificate.relative_bound = 1;
  EXPECT_EQ(between(claimed, check_of(2, 0)), Agreement::kContradicted);
}

TEST(Claims, NothingClaimedOrNothingFoundIsNotRepeated) {
  Outcome nothing = check_of(0, 0);
  nothing.check->certificate.level = Level::kNone;
  EXPECT_EQ(between(nothing, check_of(0, 0)), Agreement::kNotRepeated);
  EXPECT_EQ(between(check_of(0, 0), nothing), Agreement::kNotRepeated);
  EXPECT_EQ(between(count_of(3, 3), {}), Agreement::kNotRepeated);
  Outcome other_meaning = count_of(3, 3);
  other_meaning.count->counts[0].meaning = "negative directions at the shift";
  EXPECT_EQ(between(count_of(3, 3), other_meaning), Agreement::kNotRepeated);
}

TEST(Claims, CountsContradictByRange) {
  EXPECT_EQ(between(count_of(3, 3), count_of(4, 4)), Agreement::kContradicted);
  EXPECT_EQ(between(count_of(1, 3), count_of(4, 5)), Agreement::kContradicted);
  EXPECT_EQ(between(count_of(4, 11), count_of(4, 4)), Agreement::kContradicted) << "more than there are rows";
}

TEST(Claims, WhatFollowsFromTheCountsMustBeSaidAgain) {
  Outcome claimed = count_of(3, 3), found = claimed;
  claimed.count->sentences = {"K + f G is positive definite at every f in [0, 1.5]."};
  const auto comparisons = compare_claims(claimed, found);
  ASSERT_EQ(comparisons.size(), 2U);
  EXPECT_EQ(comparisons[0].agreement, Agreement::kAgreed);
  EXPECT_EQ(comparisons[1].agreement, Agreement::kNotRepeated);
  found.count->sentences = {"Something else.", claimed.count->sentences[0]};
  EXPECT_EQ(between(claimed, found), Agreement::kAgreed);
}

TEST(Claims, ConstrainedStructuresAreComparedToo) {
  Outcome claimed = check_of(2, 0), found = claimed;
  claimed.check->constrained.emplace().rank = 2;
  EXPECT_EQ(between(claimed, found), Agreement::kNotRepeated);
  found.check->constrained.emplace().rank = 1;
  EXPECT_EQ(between(claimed, found), Agreement::kContradicted);
  found.check->constrained->rank = 2;
  EXPECT_EQ(between(claimed, found), Agreement::kNotRepeated) << "no inertia on the constraints";
  claimed.check->constrained->inertia = found.check->constrained->inertia = Inertia{0, 0, 6, 0};
  EXPECT_EQ(between(claimed, found), Agreement::kAgreed);
  claimed.check->constrained->inertia = Inertia{1, 0, 5, 0};
  EXPECT_EQ(between(claimed, found), Agreement::kContradicted);
}

TEST(Claims, RangesOnTheConstraints) {
  Outcome claimed = check_of(2, 0), found = claimed;
  claimed.check->constrained.emplace().negative_range = {0, 1};
  found.check->constrained.emplace().negative_range = {0, 2};
  EXPECT_EQ(between(claimed, found), Agreement::kNotRepeated);
  found.check->constrained->negative_range = {1, 1};
  EXPECT_EQ(between(claimed, found), Agreement::kAgreed);
  found.check->constrained->negative_range = {2, 2};
  EXPECT_EQ(between(claimed, found), Agreement::kContradicted);
}

TEST(Claims, VerdictsForAllRoundings) {
  Outcome claimed = check_of(0, 0), found = claimed;
  claimed.check->verdict_for_digits = found.check->verdict_for_digits = Verdict::kPositiveDefinite;
  EXPECT_EQ(between(claimed, found), Agreement::kAgreed);
  found.check->verdict_for_digits = Verdict::kPositiveSemidefinite;
  EXPECT_EQ(between(claimed, found), Agreement::kNotRepeated);
  found.check->verdict_for_digits = Verdict::kIndefinite;
  EXPECT_EQ(between(claimed, found), Agreement::kContradicted);
  found.check->verdict_for_digits.reset();
  EXPECT_EQ(between(claimed, found), Agreement::kNotRepeated);
}

TEST(Claims, ACountMayRestOnMoreThanItsOwnCertificate) {
  // K certified definite by statistics, the factorization at the shift by proof: the count is statistical.
  Outcome claimed = count_of(3, 3);
  ShiftCount& count = claimed.count->counts[0];
  count.certificate = check_of(3, 0).check->certificate;
  count.method = "offsets";
  EXPECT_EQ(between(claimed, count_of(3, 3)), Agreement::kAgreed);
  count.failure_probability.reset();
  EXPECT_EQ(between(claimed, count_of(3, 3)), Agreement::kContradicted)
      << "statistical without a probability";
  // Both by statistics, after one attempt that did not pass: the failure probabilities of both add up.
  Outcome both = count_of(3, 3);
  both.events = {{{}, 6e-7, false}, {{}, 1.5e-7, true}, {-2.5, 0.7e-7, true}};
  both.risk = 8.2e-7;
  both.count->counts[0].certificate.failure_probability = 0.7e-7;
  both.count->counts[0].failure_probability = 2.2e-7;
  EXPECT_EQ(between(both, count_of(3, 3)), Agreement::kAgreed);
  both.count->counts[0].failure_probability = 0.5e-7;
  EXPECT_EQ(between(both, count_of(3, 3)), Agreement::kContradicted) << "surer than its own certificate";
  both.count->counts[0].failure_probability = both.count->counts[0].certificate.failure_probability = 1e-9;
  EXPECT_EQ(between(both, count_of(3, 3)), Agreement::kContradicted) << "surer than any attempt that passed";
}

TEST(Claims, TheRiskIsThatOfTheAttempts) {
  const auto altered = [](auto change) {
    Outcome claimed = relative_check_of(2);
    change(claimed);
    return between(claimed, check_of(2, 0));
  };
  EXPECT_EQ(altered([](Outcome&) {}), Agreement::kAgreed);
  EXPECT_EQ(altered([](Outcome& o) { o.risk = 1e-9; }), Agreement::kContradicted);
  EXPECT_EQ(altered([](Outcome& o) { o.events.push_back({{}, 1e-7, false}); }), Agreement::kContradicted);
  EXPECT_EQ(altered([](Outcome& o) { o.events.clear(); }), Agreement::kContradicted);
  EXPECT_EQ(altered([](Outcome& o) { o.risk_allowed = 1e-7; }), Agreement::kContradicted);
  EXPECT_EQ(altered([](Outcome& o) { o.check->certificate.failure_probability = 1e-8; }),
            Agreement::kContradicted);
}

/// A count with a distance that holds no eigenvalue.
Outcome count_with_radius(double radius) {
  Outcome outcome = count_of(3, 3);
  outcome.count->counts[0].no_eigenvalue_within = radius;
  return outcome;
}

TEST(Claims, DistancesWithoutAnEigenvalueAreLookedInto) {
  const Outcome claimed = count_with_radius(0.5);
  EXPECT_EQ(between(claimed, count_with_radius(0.5)), Agreement::kAgreed);
  EXPECT_TRUE(interval_ends(claimed, count_with_radius(0.6)).empty());
  EXPECT_EQ(between(claimed, count_with_radius(0.1)), Agreement::kNotRepeated);
  const auto ends = interval_ends(claimed, count_of(3, 3));
  ASSERT_EQ(ends.size(), 2U);
  EXPECT_NEAR(ends[0], 2.0, 1e-9);
  EXPECT_NEAR(ends[1], 3.0, 1e-9);
  EXPECT_GT(ends[0], 2.0);
  EXPECT_LT(ends[1], 3.0);
  const auto with_ends = [&](std::pair<Index, Index> low, std::pair<Index, Index> high,
                             const char* meaning = "eigenvalues below the shift", double moved = 0) {
    Outcome moved_claim = claimed, found = count_of(3, 3);
    for (Outcome* outcome : {&moved_claim, &found}) {
      outcome->count->counts[0].meaning = meaning;
      outcome->count->counts[0].shift += moved;
    }
    std::vector<ShiftCount> counts;
    for (const auto& [range, shift] : {std::pair{low, ends[0]}, std::pair{high, ends[1]}}) {
      counts.push_back(count_of(range.first, range.second).count->counts[0]);
      counts.back().meaning = meaning;
      counts.back().shift = shift + moved;
    }
    return worst(compare_claims(moved_claim, found, counts));
  };
  EXPECT_EQ(with_ends({3, 3}, {3, 3}), Agreement::kAgreed);
  EXPECT_EQ(with_ends({3, 3}, {4, 4}), Agreement::kContradicted);
  EXPECT_EQ(with_ends({2, 3}, {4, 5}), Agreement::kContradicted);
  EXPECT_EQ(with_ends({3, 3}, {3, 4}), Agreement::kNotRepeated);
  // Factors between 0 and the shift: on the negative side the farther end is the lower one.
  const char* factors = "critical factors between 0 and the shift";
  EXPECT_EQ(with_ends({3, 3}, {3, 3}, factors, -5), Agreement::kAgreed);
  EXPECT_EQ(with_ends({4, 4}, {3, 3}, factors, -5), Agreement::kContradicted);
  EXPECT_EQ(with_ends({0, 0}, {0, 0}, factors, -2.5), Agreement::kAgreed);
  EXPECT_EQ(with_ends({0, 0}, {1, 1}, factors, -2.5), Agreement::kContradicted);
  EXPECT_EQ(with_ends({1, 1}, {0, 0}, factors, -2.5), Agreement::kContradicted);
  // Negative directions may come and go: as many at both ends shows nothing.
  const char* directions = "negative directions of K + f G at the shift";
  EXPECT_EQ(with_ends({3, 3}, {3, 3}, directions), Agreement::kNotRepeated);
  EXPECT_EQ(with_ends({4, 4}, {3, 3}, directions), Agreement::kContradicted);
}

/// A count by offsets that leaves one eigenvalue open in a band.
Outcome count_with_band(double half_width, double reach = 1e-12) {
  Outcome outcome = count_of(2, 3);
  ShiftCount& count = outcome.count->counts[0];
  count.certificate = check_of(2, 1, reach, reach / 10).check->certificate;
  count.method = "offsets";
  count.holds_outside = {count.shift - half_width, count.shift + half_width};
  return outcome;
}

TEST(Claims, BandsFollowFromTheirResolutionOrAreLookedInto) {
  EXPECT_EQ(between(count_with_band(1e-9), count_with_band(1.2e-9)), Agreement::kAgreed);
  EXPECT_EQ(between(count_with_band(1e-9), count_with_band(1e-10, 1e-13)), Agreement::kAgreed);
  const Outcome narrow = count_with_band(1e-10), found = count_with_band(1e-9);
  EXPECT_EQ(between(narrow, found), Agreement::kNotRepeated);
  const auto ends = interval_ends(narrow, found);
  ASSERT_EQ(ends.size(), 2U);
  const auto with_ends = [&](std::pair<Index, Index> low, std::pair<Index, Index> high) {
    std::vector<ShiftCount> counts;
    for (const auto& [range, shift] : {std::pair{low, ends[0]}, std::pair{high, ends[1]}}) {
      counts.push_back(count_of(range.first, range.second).count->counts[0]);
      counts.back().shift = shift;
    }
    return worst(compare_claims(narrow, found, counts));
  };
  EXPECT_EQ(with_ends({2, 2}, {3, 3}), Agreement::kAgreed);
  EXPECT_EQ(with_ends({2, 2}, {2, 2}), Agreement::kContradicted);
  EXPECT_EQ(with_ends({2, 3}, {2, 3}), Agreement::kNotRepeated);
  Outcome elsewhere = count_with_band(1e-9);
  elsewhere.count->counts[0].holds_outside = {2.6, 2.7};
  EXPECT_EQ(between(elsewhere, found), Agreement::kNotRepeated) << "the band must hold the shift";
}

}  // namespace
}  // namespace stanchion
