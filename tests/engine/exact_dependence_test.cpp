// Exact dependence: against the rank over the rationals, and one bit beside it.
#include "engine/exact_dependence.hpp"

#include <gtest/gtest.h>

#include <numeric>
#include <random>

namespace stanchion {
namespace {

constexpr Offset kEnough = 1'000'000'000;

TEST(ExactDependence, TellsOneBit) {
  const double a = 0.1, third = 1.0 / 3;
  EXPECT_TRUE(vanishes_exactly({{{0, a}, {1, third}}, {{0, -a}, {1, -third}}}, {{0, 1}, {1, 1}}));
  EXPECT_TRUE(vanishes_exactly({{{0, a}}, {{0, a}}, {{0, a}}}, {{0, 1}, {1, 1}, {2, -2}}));
  EXPECT_FALSE(vanishes_exactly({{{0, a}}, {{0, a}}, {{0, a}}}, {{0, 1}, {1, 2}, {2, -3.0000000000000004}}));
  // 0.1 + 0.2 - 0.3 rounds to zero in no order of doubles that matters here: exactly it is 2^-55.
  EXPECT_FALSE(vanishes_exactly({{{0, 0.1}}, {{0, 0.2}}, {{0, 0.3}}}, {{0, 1}, {1, 1}, {2, -1}}));
  // Sums that lose the small term in double precision.
  EXPECT_FALSE(vanishes_exactly({{{0, 1e30}}, {{0, 1}}, {{0, -1e30}}}, {{0, 1}, {1, 1}, {2, 1}}));
  EXPECT_TRUE(
      vanishes_exactly({{{0, 1e30}}, {{0, 1}}, {{0, -1e30}}, {{0, -1}}}, {{0, 1}, {1, 1}, {2, 1}, {3, 1}}));
  // Products that a double cannot hold: (1 + 2^-30)^2 is not 1 + 2^-29.
  EXPECT_FALSE(vanishes_exactly({{{0, 1 + 0x1p-30}}, {{0, 1 + 0x1p-29}}}, {{0, 1 + 0x1p-30}, {1, -1}}));
}

/// Sums of products of whole numbers, which 128 bits hold without rounding: zero, or one unit beside it.
TEST(ExactDependence, AgreesWithWholeNumbers) {
  __extension__ typedef __int128 Wide;
  constexpr Wide kLimb = Wide{1} << 50;
  std::mt19937_64 random(7);
  for (int round = 0; round < 20000; ++round) {
    SparseColumn combination;
    std::vector<SparseColumn> vectors;
    const auto add = [&](double factor, double value) {
      if (factor == 0 || value == 0) return;
      combination.push_back({static_cast<Index>(vectors.size()), factor});
      vectors.push_back({{0, std::ldexp(value, -300)}});
    };
    const auto whole = [&](int bits) { return static_cast<std::int64_t>(random() % (1ULL << bits)); };
    const Wide off = round % 2;
    Wide rest = off;
    for (int terms = 1 + static_cast<int>(random() % 12); terms > 0; --terms) {
      const std::int64_t value = whole(1 + static_cast<int>(random() % 52));
      const std::int64_t factor = whole(1 + static_cast<int>(random() % 50)) - whole(40);
      add(static_cast<double>(factor), static_cast<double>(value));
      rest -= static_cast<Wide>(value) * factor;
    }
    for (double unit = 1; rest != 0; rest /= kLimb, unit *= 0x1p50)  // what is left, in pieces of 50 bits
      add(unit, static_cast<double>(static_cast<std::int64_t>(rest % kLimb)));
    ASSERT_EQ(vanishes_exactly(vectors, combination), off == 0) << round;
  }
}

TEST(ExactDependence, GivesNoAnswerNearTheLimits) {
  EXPECT_FALSE(vanishes_exactly({{{0, 1e-300}}, {{0, -1e-300}}}, {{0, 1}, {1, 1}}));
  EXPECT_FALSE(vanishes_exactly({{{0, 1e300}}, {{0, -1e300}}}, {{0, 1}, {1, 1}}));
}

/// The rank of small whole numbers by elimination in fractions of 64 bits (Bareiss: without division that
/// rounds); few and small enough that nothing overflows.
Index rank_of(std::vector<std::vector<long long>> a) {
  long long before = 1;
  std::size_t rank = 0;
  const std::size_t columns = a.front().size();
  for (std::size_t c = 0; c < columns && rank < a.size(); ++c) {
    std::size_t pivot = rank;
    while (pivot < a.size() && a[pivot][c] == 0) ++pivot;
    if (pivot == a.size()) continue;
    std::swap(a[pivot], a[rank]);
    for (std::size_t k = rank + 1; k < a.size(); ++k) {
      for (std::size_t j = c + 1; j < columns; ++j)
        a[k][j] = (a[rank][c] * a[k][j] - a[k][c] * a[rank][j]) / before;
      a[k][c] = 0;
    }
    before = a[rank][c];
    ++rank;
  }
  return static_cast<Index>(rank);
}

TEST(ExactDependence, NeverTakesAwayRank) {
  std::mt19937 random(11);
  int marked = 0;
  for (int round = 0; round < 2000; ++round) {
    const int columns = 3 + static_cast<int>(random() % 4), many = 2 + static_cast<int>(random() % 6);
    std::vector<std::vector<long long>> whole;
    std::vector<SparseColumn> vectors;
    for (int k = 0; k < many; ++k) {
      whole.emplace_back(static_cast<std::size_t>(columns), 0);
      vectors.emplace_back();
      for (int c = 0; c < columns; ++c) {
        const int value = random() % 2 == 0 ? 0 : static_cast<int>(random() % 5) - 2;
        whole.back()[static_cast<std::size_t>(c)] = value;
        if (value != 0) vectors.back().push_back({c, std::ldexp(static_cast<double>(value), k)});
      }
    }
    const auto dependent = exactly_dependent(vectors, columns, kEnough);
    std::vector<std::vector<long long>> rest{std::vector<long long>(static_cast<std::size_t>(columns), 0)};
    for (int k = 0; k < many; ++k) {
      if (!dependent[static_cast<std::size_t>(k)]) rest.push_back(whole[static_cast<std::size_t>(k)]);
    }
    EXPECT_EQ(rank_of(rest), rank_of(whole)) << round;
    marked += std::accumulate(dependent.begin(), dependent.end(), 0);
  }
  EXPECT_GT(marked, 1000);
}

}  // namespace
}  // namespace stanchion
