// Columns that follow from others, against the rank over a finite field.
#include "diagnose/dependent_columns.hpp"

#include <gtest/gtest.h>

#include <cmath>
#include <random>
#include <vector>

#include "diagnose/sparse_basis.hpp"

namespace stanchion {
namespace {

constexpr Offset kEnough = 1'000'000'000;

/// The largest entry of the combination of `columns`.
double largest(const std::vector<SparseColumn>& columns, Index rows, const SparseColumn& combination) {
  std::vector<double> sum(static_cast<std::size_t>(rows), 0.0);
  double most = 0;
  for (const SparseEntry& part : combination) {
    for (const SparseEntry& entry : columns[static_cast<std::size_t>(part.at)])
      sum[static_cast<std::size_t>(entry.at)] += part.value * entry.value;
  }
  for (const double value : sum) most = std::max(most, std::fabs(value));
  return most;
}

/// Rank of whole numbers modulo the prime 2^31 - 1: that over the rationals unless the prime divides a
/// determinant, by elimination without rounding.
Index exact_rank(const std::vector<SparseColumn>& columns, Index rows) {
  using Whole = long long;
  constexpr Whole kPrime = 2147483647;
  std::vector<std::vector<Whole>> a;
  for (const SparseColumn& column : columns) {
    a.emplace_back(static_cast<std::size_t>(rows), 0);
    for (const SparseEntry& entry : column)
      a.back()[static_cast<std::size_t>(entry.at)] =
          (static_cast<Whole>(entry.value) % kPrime + kPrime) % kPrime;
  }
  const auto inverse = [](Whole x) {
    Whole result = 1;
    for (Whole power = kPrime - 2; power > 0; power /= 2, x = x * x % kPrime) {
      if (power % 2 == 1) result = result * x % kPrime;
    }
    return result;
  };
  std::size_t rank = 0;
  for (std::size_t r = 0; r < static_cast<std::size_t>(rows) && rank < a.size(); ++r) {
    std::size_t pivot = rank;
    while (pivot < a.size() && a[pivot][r] == 0) ++pivot;
    if (pivot == a.size()) continue;
    std::swap(a[pivot], a[rank]);
    const Whole by = inverse(a[rank][r]);
    for (std::size_t k = rank + 1; k < a.size(); ++k) {
      const Whole factor = a[k][r] * by % kPrime;
      for (std::size_t i = r; factor != 0 && i < static_cast<std::size_t>(rows); ++i)
        a[k][i] = ((a[k][i] - factor * a[rank][i]) % kPrime + kPrime) % kPrime;
    }
    ++rank;
  }
  return static_cast<Index>(rank);
}

TEST(DependentColumns, ARingByHand) {
  const std::vector<SparseColumn> ring{{{0, 1}, {1, -1}}, {{1, 1}, {2, -1}}, {{3, 5}}, {{0, 2}, {2, -2}}};
  const auto found = dependent_columns(ring, 4, kEnough);
  ASSERT_EQ(found.size(), 1U);
  ASSERT_EQ(found[0].size(), 3U);
  const double expected[][2] = {{0, -2}, {1, -2}, {3, 1}};
  for (std::size_t k = 0; k < 3; ++k) {
    EXPECT_EQ(found[0][k].at, expected[k][0]);
    EXPECT_DOUBLE_EQ(found[0][k].value, expected[k][1]);
  }
}

TEST(DependentColumns, IndependentOnesGiveNothing) {
  EXPECT_TRUE(dependent_columns({{{0, 1}}, {{0, 1}, {1, 1e-6}}, {{2, 3}}}, 3, kEnough).empty());
  EXPECT_TRUE(dependent_columns({}, 3, kEnough).empty());
}

TEST(DependentColumns, AsManyAsTheExactRankLeaves) {
  std::mt19937 random(7);
  for (int round = 0; round < 60; ++round) {
    const Index rows = 10 + round, count = 5 + 2 * (round % 40);
    std::vector<SparseColumn> columns;
    for (Index c = 0; c < count; ++c) {
      SparseColumn column;
      for (Index r = 0; r < rows; ++r) {
        const int value = static_cast<int>(random() % 7) - 3;
        if (random() % 6 == 0 && value != 0) column.push_back({r, static_cast<double>(value)});
      }
      if (column.empty()) column.push_back({static_cast<Index>(random() % 10), 1});
      columns.push_back(std::move(column));
    }
    const auto found = dependent_columns(columns, rows, kEnough);
    EXPECT_EQ(static_cast<Index>(found.size()), count - exact_rank(columns, rows)) << round;
    for (const SparseColumn& one : found) {
      double size = 0;
      for (const SparseEntry& entry : one) size = std::max(size, std::fabs(entry.value));
      EXPECT_LE(largest(columns, rows, one), 1e-11 * size) << round;
    }
  }
}

double dot(const SparseColumn& a, const SparseColumn& b, Index rows) {
  std::vector<double> dense(static_cast<std::size_t>(rows), 0.0);
  for (const SparseEntry& entry : a) dense[static_cast<std::size_t>(entry.at)] = entry.value;
  double sum = 0;
  for (const SparseEntry& entry : b) sum += entry.value * dense[static_cast<std::size_t>(entry.at)];
  return sum;
}

TEST(SparseBasis, OfAStripIsOrthonormalSpansItAndStaysSparse) {
  constexpr Index kLength = 900, kRows = 2 * kLength + 1;
  std::vector<SparseColumn> strip;
  for (Index k = 0; k < kLength; ++k) strip.push_back({{2 * k, 1}, {2 * k + 1, -1}, {2 * k + 2, 1}});
  const auto basis = sparse_orthonormal(strip, kRows, kEnough, kEnough);
  ASSERT_EQ(basis.size(), strip.size());
  std::size_t entries = 0;
  for (std::size_t a = 0; a < basis.size(); ++a) {
    entries += basis[a].size();
    for (std::size_t b = 0; b <= a; ++b)
      ASSERT_NEAR(dot(basis[a], basis[b], kRows), a == b ? 1 : 0, 1e-14) << a << ' ' << b;
    double in_span = 0;
    for (const SparseColumn& q : basis) in_span += std::pow(dot(q, strip[a], kRows), 2);
    ASSERT_NEAR(in_span, 3, 1e-12) << a;
  }
  EXPECT_LT(entries, basis.size() * 100);
}

TEST(SparseBasis, LeavesOutWhatDependsAndStopsWhereThereIsNoRoom) {
  const std::vector<SparseColumn> three{{{0, 1}, {1, 1}}, {{1, 2}, {2, 1}}, {{0, 1}, {1, 3}, {2, 1}}};
  EXPECT_EQ(sparse_orthonormal(three, 3, kEnough, kEnough).size(), 2U);
  EXPECT_EQ(sparse_orthonormal(three, 3, kEnough, 1).size(), 1U);
}

TEST(DependentColumns, StopsWhereTheStepsEnd) {
  std::vector<SparseColumn> columns;
  for (Index k = 0; k < 200; ++k) {
    columns.push_back({{k, 1}, {k + 1, -1}});
    columns.push_back({{k, 1}, {k + 2, -1}});
  }
  const auto all = dependent_columns(columns, 202, kEnough), some = dependent_columns(columns, 202, 400);
  EXPECT_EQ(all.size(), 199U);
  EXPECT_LT(some.size(), all.size());
  for (const SparseColumn& one : some) EXPECT_LE(largest(columns, 202, one), 1e-14);
}

}  // namespace
}  // namespace stanchion
