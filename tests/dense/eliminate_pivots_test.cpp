// Which pivots are taken, which wait, and what is refused.
#include <gtest/gtest.h>

#include <limits>

#include "dense/front_makers.hpp"

namespace stanchion {
namespace {

using test::FrontCase;
using test::Full;
using test::full_from;
using test::Random;

TEST(EliminatePivots, AZeroMatrixGivesZeroPivotsAndNothingElse) {
  for (const Index order : {1, 5, 70, 300}) {
    FrontCase front(Full(order), order);
    front.run({});
    EXPECT_EQ(front.result.eliminated, order);
    for (const PivotKind kind : front.kind) EXPECT_EQ(kind, PivotKind::kZero);
    for (const double d : front.diagonal) EXPECT_EQ(d, 0);
    for (const double error : front.claimed()) EXPECT_LE(error, 1e-300);
  }
}

TEST(EliminatePivots, AZeroColumnIsAPivotEvenWithRowsBelow) {
  Random random(81);
  Full matrix = test::positive_definite(random, 30);
  for (Index i = 0; i < 30; ++i) matrix.set(i, 4, 0);
  FrontCase front(std::move(matrix), 12);
  front.run({});
  EXPECT_EQ(front.result.eliminated, 12);
  EXPECT_EQ(std::count(front.kind.begin(), front.kind.end(), PivotKind::kZero), 1);
}

/// Candidates without a diagonal, each coupled to one that lies tiles away; the last has no partner but a row
/// below.
TEST(EliminatePivots, CandidatesThatFailedAreTriedAgainBesideTheirPartners) {
  constexpr Index kPairs = 100, kCandidates = 2 * kPairs + 1, kOrder = kCandidates + 30;
  const Full matrix = full_from(kOrder, [](Index i, Index j) {
    if (i < 2 * kPairs && i + j == 2 * kPairs - 1) return 5.0;
    if (i >= kCandidates && j == kCandidates - 1) return 7.0;
    return i >= kCandidates && j < 2 * kPairs ? 0.01 * ((i * 31 + j * 17) % 23) : 0.0;
  });
  FrontCase front(matrix, kCandidates);
  front.run({});
  EXPECT_EQ(front.result.eliminated, 2 * kPairs);
  EXPECT_EQ(front.result.two_by_two, kPairs);
  // By tiles, not one search after the other: one addition a tile or column block, not one a pivot.
  EXPECT_GE(front.result.additions, 2);
  EXPECT_LE(front.result.additions, 12);
  for (Index k = 0; k < 2 * kPairs; k += 2) {
    const auto at = static_cast<std::size_t>(k);
    EXPECT_EQ(front.label[at] + front.label[at + 1], 2 * kPairs - 1);
  }
}

TEST(EliminatePivots, AdditionsCountEveryTileOfAPanel) {
  Random random(82);
  FrontCase front(test::positive_definite(random, 3 * kTileWidth), 3 * kTileWidth);
  front.run({});
  EXPECT_GE(front.result.additions, 2);  // the last tile has had two before it
}

TEST(EliminatePivots, AZeroDiagonalTakesPairs) {
  FrontCase front(full_from(2, [](Index i, Index j) { return i == j ? 0.0 : 3.0; }), 2);
  front.run({});
  EXPECT_EQ(front.result.two_by_two, 1);
  EXPECT_EQ(front.kind[0], PivotKind::kTwoFirst);
  EXPECT_EQ(front.kind[1], PivotKind::kTwoSecond);
  EXPECT_EQ(front.off_diagonal[0], 3);
}

TEST(EliminatePivots, ACandidateWithOnlyRowsBelowMustWait) {
  // [0 1; 1 0] of which only the first row may be eliminated.
  FrontCase front(full_from(2, [](Index i, Index j) { return i == j ? 0.0 : 1.0; }), 1);
  front.run({});
  EXPECT_EQ(front.result.eliminated, 0);
  EXPECT_EQ(front.at(1, 0), 1);
  EXPECT_EQ(front.row_error, (std::vector<double>{0, 0}));
}

TEST(EliminatePivots, WaitingColumnsAreUpdatedByTheOthers) {
  // Candidate 0 is good, candidate 1 has diagonal 0 and a strong row below: S is known by hand.
  Full matrix(3);
  matrix.set(0, 0, 2);
  matrix.set(1, 0, 4);
  matrix.set(1, 1, 8);
  matrix.set(2, 0, 6);
  matrix.set(2, 1, 1000);
  matrix.set(2, 2, 5);
  FrontCase front(std::move(matrix), 2);
  front.run({});
  ASSERT_EQ(front.result.eliminated, 1);
  EXPECT_EQ(front.at(1, 1), 8 - 4.0 * 4 / 2);
  EXPECT_EQ(front.at(2, 1), 1000 - 6.0 * 4 / 2);
  EXPECT_EQ(front.at(2, 2), 5 - 6.0 * 6 / 2);
}

TEST(EliminatePivots, HopelessCandidatesWaitAndTheRestIsEliminated) {
  Random random(82);
  for (const Index order : {40, 200, 600}) {
    const Index candidates = order / 2;
    FrontCase front(test::weak_candidates(random, order, candidates, 1e-12), candidates);
    front.run({});
    EXPECT_LT(front.result.eliminated, candidates);
    EXPECT_GE(front.result.eliminated, candidates / 2 - 1) << "every second candidate is strong";
    std::vector<char> seen(static_cast<std::size_t>(order), 0);
    for (const Index row : front.label) ++seen[static_cast<std::size_t>(row)];
    EXPECT_EQ(std::count(seen.begin(), seen.end(), 1), order);
    for (Index i = candidates; i < order; ++i) EXPECT_EQ(front.label[static_cast<std::size_t>(i)], i);
  }
}

TEST(EliminatePivots, NoRowsBelowMeansEverythingIsEliminated) {
  Random random(83);
  for (int round = 0; round < 200; ++round) {
    const auto order = static_cast<Index>(1 + round % 90);
    // Sparse integers with many exact cancellations and zero rows.
    FrontCase front(
        full_from(order,
                  [&](Index, Index) { return static_cast<double>(random() % 9 ? 0 : 1 + random() % 2); }),
        order);
    front.run({false, 0.01, true});
    EXPECT_EQ(front.result.eliminated, order) << "order " << order;
    front.expect_bound_holds();
  }
}

TEST(EliminatePivots, DefiniteStopsAtTheFirstPivotThatIsNotPositive) {
  Random random(84);
  for (const double bad : {0.0, -1e-3, -1e300}) {
    Full matrix = test::positive_definite(random, 150);
    matrix.set(100, 100, bad);
    FrontCase front(std::move(matrix), 150);
    front.run({true, 0.01, false});
    EXPECT_TRUE(front.result.stopped);
    EXPECT_FALSE(front.result.not_finite);
  }
}

TEST(EliminatePivots, InfinityAndNanAreNotFinite) {
  Random random(85);
  for (const double bad :
       {std::numeric_limits<double>::infinity(), std::numeric_limits<double>::quiet_NaN()}) {
    for (const auto& [row, column] : {std::pair{3, 3}, {50, 7}, {119, 70}, {80, 80}}) {
      for (const bool definite : {false, true}) {
        Full matrix = test::positive_definite(random, 120);
        matrix.set(row, column, bad);
        FrontCase front(std::move(matrix), 90);
        front.run({definite, 0.01, false});
        const bool poisoned = front.result.not_finite || front.result.stopped;
        bool finite_bound = true;
        for (const double bound : front.claimed()) finite_bound = finite_bound && std::isfinite(bound);
        EXPECT_TRUE(poisoned || !finite_bound) << row << ", " << column << " definite " << definite;
      }
    }
  }
}

TEST(EliminatePivots, OverflowIsNoticed) {
  Random random(86);
  FrontCase front(
      full_from(60,
                [&](Index i, Index j) { return (i == j ? 1e-200 : 1e200) * test::uniform(random, 1, 2); }),
      30);
  front.run({true, 0.01, false});
  EXPECT_TRUE(front.result.not_finite || front.result.stopped);
}

TEST(SwapSymmetric, InterchangesRowsColumnsAndCompanions) {
  Random random(87);
  for (const auto& [i, j] : {std::pair{0, 1}, {3, 290}, {299, 5}, {256, 255}, {7, 7}}) {
    FrontCase front(test::random_symmetric(random, 300), 0);
    front.run({});
    for (Index k = 0; k < 300; ++k)
      front.row_error[static_cast<std::size_t>(k)] = front.growth[static_cast<std::size_t>(k)] = k;
    swap_symmetric(front.front(), i, j, 0);
    const auto image = [a = i, b = j](Index k) { return k == a ? b : (k == b ? a : k); };
    for (Index c = 0; c < 300; ++c) {
      EXPECT_EQ(front.label[static_cast<std::size_t>(c)], image(c));
      EXPECT_EQ(front.row_error[static_cast<std::size_t>(c)], image(c));
      EXPECT_EQ(front.growth[static_cast<std::size_t>(c)], image(c));
      for (Index r = c; r < 300; ++r) ASSERT_EQ(front.at(r, c), front.original(image(r), image(c)));
    }
  }
}

}  // namespace
}  // namespace stanchion
