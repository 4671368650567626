// The proved error bound of one front, against the factorization multiplied out in extended precision.
#include <gtest/gtest.h>

#include "dense/front_makers.hpp"
#include "support/dense_reference.hpp"

namespace stanchion {
namespace {

using test::FrontCase;
using test::Random;

constexpr EliminationOptions kKeep{false, 0.01, true};

TEST(EliminateBound, HoldsOnEveryKindOfFront) {
  Random random(61);
  double used = 0;
  for (const Index order : {1, 2, 3, 5, 8, 17, 40, 64, 65, 100, 150}) {
    for (const Index candidates : {order, (order + 1) / 2, Index{1}}) {
      for (auto& [name, matrix] : test::hard_fronts(random, order, candidates)) {
        SCOPED_TRACE(std::string(name) + ", order " + std::to_string(order) + ", candidates " +
                     std::to_string(candidates));
        FrontCase front(std::move(matrix), candidates);
        front.run(kKeep);
        ASSERT_FALSE(front.result.not_finite || front.result.stopped);
        used = std::max(used, front.expect_bound_holds());
        EXPECT_LE(front.largest_multiplier(), 100 * (1 + 1e-12));
        if (candidates == order) {
          EXPECT_EQ(front.result.eliminated, order);
        }
      }
    }
  }
  RecordProperty("share_of_bound_used", std::to_string(used));
  EXPECT_GT(used, 1e-4) << "a bound this loose decides nothing";
}

TEST(EliminateBound, HoldsForTheTextbookMatrixThatDefeatsPlainElimination) {
  FrontCase front(test::full_from(2, [](Index i, Index j) { return i == 0 && j == 0 ? 1e-20 : 1.0; }), 2);
  front.run(kKeep);
  EXPECT_EQ(front.result.eliminated, 2);
  front.expect_bound_holds();
  EXPECT_LE(front.claimed()[0], 1e-13);
}

TEST(EliminateBound, HoldsWithoutPivotingOnADefiniteFront) {
  Random random(62);
  for (const Index order : {1, 7, 64, 130, 200}) {
    for (const Index candidates : {order, order / 2 + 1}) {
      FrontCase front(test::positive_definite(random, order), candidates);
      front.run({true, 0.01, true});
      ASSERT_FALSE(front.result.stopped);
      EXPECT_EQ(front.result.eliminated, candidates);
      EXPECT_EQ(front.result.two_by_two, 0);
      front.expect_bound_holds();
    }
  }
}

/// Without pivoting the factors of a barely definite front grow; the bound must say so.
TEST(EliminateBound, HoldsWithoutPivotingOnAnIllConditionedFront) {
  for (const Index order : {8, 12, 70}) {
    FrontCase front(
        test::full_from(order, [](Index i, Index j) { return 1.0 / (i + j + 1) + (i == j ? 1e-9 : 0); }),
        order);
    front.run({true, 0.01, true});
    if (!front.result.stopped) front.expect_bound_holds();
    EXPECT_FALSE(front.result.not_finite);
  }
}

TEST(EliminateBound, OtherThresholdsKeepTheirOwnPromise) {
  Random random(63);
  for (const double threshold : {0.5, 0.1, 1e-3, 1e-6}) {
    FrontCase front(test::weak_candidates(random, 90, 50, 1e-3), 50);
    front.run({false, threshold, true});
    front.expect_bound_holds();
    EXPECT_LE(front.largest_multiplier(), (1 + 1e-12) / threshold);
  }
}

TEST(EliminateBound, InertiaAgreesWithEigenvaluesOutsideTheBound) {
  Random random(64);
  for (const Index order : {3, 10, 33, 80, 120}) {
    for (auto& [name, matrix] : test::hard_fronts(random, order, order)) {
      SCOPED_TRACE(std::string(name) + ", order " + std::to_string(order));
      FrontCase front(std::move(matrix), order);
      front.run(kKeep);
      const auto bounds = front.claimed();
      const auto values = test::eigenvalues(front.original.value, order);
      const double margin = *std::max_element(bounds.begin(), bounds.end()) +
                            1e-13 * std::max(std::fabs(values.front()), std::fabs(values.back()));
      Index negative = 0, positive = 0;
      for (Index k = 0; k < order; ++k) {
        const auto kk = static_cast<std::size_t>(k);
        if (front.kind[kk] == PivotKind::kTwoFirst) {
          ++negative;  // both pairs seen here have a negative determinant: |a|, |c| < 0.65 |b|
          ++positive;
          EXPECT_LE(std::max(std::fabs(front.diagonal[kk]), std::fabs(front.diagonal[kk + 1])),
                    kTwoByTwoShare * std::fabs(front.off_diagonal[kk]));
        } else if (front.kind[kk] == PivotKind::kOne) {
          (front.diagonal[kk] < 0 ? negative : positive) += 1;
        }
      }
      EXPECT_GE(negative, std::count_if(values.begin(), values.end(), [&](double v) { return v < -margin; }));
      EXPECT_LE(negative, std::count_if(values.begin(), values.end(), [&](double v) { return v < margin; }));
      EXPECT_GE(positive, std::count_if(values.begin(), values.end(), [&](double v) { return v > margin; }));
    }
  }
}

}  // namespace
}  // namespace stanchion
