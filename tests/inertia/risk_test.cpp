#include "inertia/risk.hpp"

#include <gtest/gtest.h>

#include <cmath>

#include "base/counter_random.hpp"

namespace stanchion {
namespace {

TEST(RiskBudget, AnyNumberOfAttemptsStaysWithinTheRisk) {
  RiskBudget budget(1e-6);
  double previous = 1;
  for (int j = 1; j <= 100'000; ++j) {
    const double share = budget.charge();
    EXPECT_GT(share, 0);
    EXPECT_LT(share, previous);
    previous = share;
  }
  EXPECT_LE(budget.spent(), 1e-6);
  EXPECT_GT(budget.spent(), 0.9999e-6);
  EXPECT_EQ(budget.attempts(), 100'000);
}

TEST(SmallBall, IsBelowTheExactQuantile) {
  // erf(g / sqrt 2)^r <= failure must hold exactly; certificate.md gives g = 0.125, r = 6 for 1e-6 (rounded).
  for (const double failure : {1e-3, 1e-6, 1e-9, 1e-12}) {
    for (const Index vectors : {1, 2, 3, 6, 8}) {
      const double g = small_ball(failure, vectors);
      EXPECT_GT(g, 0);
      EXPECT_LE(std::pow(std::erf(g / std::sqrt(2.0)), vectors), failure);
    }
  }
  EXPECT_NEAR(small_ball(1e-6, 6), 0.125, 0.002);
  EXPECT_NEAR(small_ball(1e-6, 2), 1.25e-3, 1e-5);
}

TEST(CounterRandom, GaussiansHaveTheRightMomentsAndTails) {
  const CounterRandom random(99);
  const int count = 200'000;
  double sum = 0, square = 0, fourth = 0;
  int small = 0;
  for (int k = 0; k < count / 2; ++k) {
    const auto [a, b] = random.gaussians(static_cast<std::uint64_t>(k));
    for (const double x : {a, b}) {
      sum += x;
      square += x * x;
      fourth += x * x * x * x;
      small += std::fabs(x) < 0.01;
    }
  }
  EXPECT_NEAR(sum / count, 0, 5 / std::sqrt(count));
  EXPECT_NEAR(square / count, 1, 5 * std::sqrt(2.0 / count));
  EXPECT_NEAR(fourth / count, 3, 5 * std::sqrt(96.0 / count));
  // The test's failure probability rests on small values being as likely as they should be.
  const double expected = count * std::erf(0.01 / std::sqrt(2.0));
  EXPECT_NEAR(small, expected, 5 * std::sqrt(expected));
}

TEST(CounterRandom, StreamsOfDifferentKeysDiffer) {
  EXPECT_NE(CounterRandom(1).words(0), CounterRandom(2).words(0));
  EXPECT_NE(CounterRandom(1).words(0), CounterRandom(1).words(1));
  EXPECT_NE(CounterRandom::combine(1, 2), CounterRandom::combine(2, 1));
}

TEST(RiskBudget, GoesOnWhereAnEarlierPartOfTheDocumentStopped) {
  RiskBudget whole(1e-6), first(1e-6);
  for (int j = 0; j < 3; ++j) first.charge();
  RiskBudget second(1e-6, first.spent(), first.attempts());
  for (int j = 0; j < 3; ++j) whole.charge();
  EXPECT_EQ(second.charge(), whole.charge());
  EXPECT_EQ(second.spent(), whole.spent());
  EXPECT_EQ(second.attempts(), whole.attempts());
}

}  // namespace
}  // namespace stanchion
