#include "sparse/matrix_family.hpp"

#include <gtest/gtest.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <numeric>
#include <random>

#include "sparse/product.hpp"
#include "sparse/scaling.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

/// A matrix large enough for threads, a second one on fewer entries, and a shuffled numbering.
struct Case {
  SymmetricMatrix first = test::laplacian(48, 47, 46, 0.25), second = test::laplacian(48, 47, 46);
  Buffer<Index> position_of{first.rows};

  Case() {
    std::iota(position_of.begin(), position_of.end(), 0);
    std::shuffle(position_of.begin(), position_of.end(), std::mt19937(7));
    // Every third entry off the diagonal, and every fifth diagonal entry, leaves the second matrix.
    Offset kept = 0;
    Offset begin = 0;
    for (Index j = 0; j < second.rows; ++j) {
      const Offset end = second.column_start[Offset{j} + 1];
      for (Offset k = begin; k < end; ++k) {
        if (second.row[k] == j ? j % 5 == 0 : k % 3 == 0) continue;
        second.row[kept] = second.row[k];
        second.value[kept++] = second.value[k] * 3;
      }
      begin = end;
      second.column_start[Offset{j} + 1] = kept;
    }
    second.row.shrink(kept);
    second.value.shrink(kept);
  }
};

template <class T>
::testing::AssertionResult same(const Buffer<T>& a, const Buffer<T>& b) {
  if (a.size() == b.size() && std::equal(a.begin(), a.end(), b.begin())) return ::testing::AssertionSuccess();
  return ::testing::AssertionFailure() << "sizes " << a.size() << " and " << b.size();
}

void expect_same(const MatrixFamily& a, const MatrixFamily& b) {
  EXPECT_EQ(a.rows, b.rows);
  EXPECT_TRUE(same(a.column_start, b.column_start));
  EXPECT_TRUE(same(a.row, b.row));
  ASSERT_EQ(a.values.size(), b.values.size());
  for (std::size_t t = 0; t < a.values.size(); ++t) EXPECT_TRUE(same(a.values[t], b.values[t]));
}

TEST(MatrixFamily, IsTheSameForAnyNumberOfThreads) {
  const Case given;
  const std::vector<const SymmetricMatrix*> members{&given.first, &given.second};
  const std::vector<double> coefficients{1, -0.4}, indefinite{1, -1.7};
  const MatrixFamily alone = unite(members), renamed = permute(alone, given.position_of);
  ASSERT_GT(alone.entries(), 200'000);
  const auto scale = power_of_two_scaling(renamed, coefficients),
             other = power_of_two_scaling(renamed, indefinite);
  ASSERT_TRUE(scale.ok() && other.ok());
  for (const int threads : {2, 3, 8}) {
    ThreadPool pool(threads);
    expect_same(unite(members, &pool), alone);
    expect_same(permute(alone, given.position_of, &pool), renamed);
    EXPECT_TRUE(same(*power_of_two_scaling(renamed, coefficients, &pool), *scale));
    EXPECT_TRUE(same(*power_of_two_scaling(renamed, indefinite, &pool), *other));
  }
}

TEST(MatrixFamily, HoldsEachMembersEntries) {
  const Case given;
  const std::vector<const SymmetricMatrix*> members{&given.first, &given.second};
  ThreadPool pool(2);
  const MatrixFamily family = unite(members, &pool);
  for (std::size_t t = 0; t < 2; ++t) {
    Offset found = 0;
    for (Index j = 0; j < family.rows; ++j) {
      ASSERT_EQ(family.row[family.column_start[j]], j) << "the diagonal comes first";
      Offset at = members[t]->column_start[j];
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const bool has = at < members[t]->column_start[Offset{j} + 1] && members[t]->row[at] == family.row[k];
        ASSERT_EQ(family.values[t][k], has ? members[t]->value[at] : 0.0);
        at += has ? 1 : 0;
        found += has ? 1 : 0;
      }
    }
    EXPECT_EQ(found, members[t]->column_start[family.rows]);
  }
}

TEST(MatrixFamily, OfOneMatrixAddsTheDiagonalsItLacks) {
  Case given;
  const std::vector<const SymmetricMatrix*> members{&given.second};
  const MatrixFamily copied = unite(members);
  expect_same(family_of(given.second.clone()), copied);
  const double* values = given.first.value.data();
  const MatrixFamily moved = family_of(std::move(given.first));
  EXPECT_EQ(moved.values[0].data(), values) << "a matrix with its diagonals is taken over, not copied";
}

TEST(Scaling, RefusesWhatIsNotANumberOrOutOfRange) {
  for (const double bad : {1e308, -1e308}) {
    SymmetricMatrix matrix = test::laplacian(3, 3, 1);
    matrix.value[1] = bad;  // off the diagonal
    const std::vector<const SymmetricMatrix*> members{&matrix, &matrix};
    const std::vector<double> coefficients{10, -10};  // infinity less infinity
    const auto scale = power_of_two_scaling(unite(members), coefficients);
    ASSERT_FALSE(scale.ok());
    EXPECT_EQ(scale.status().code(), "scaling-range");
  }
}

TEST(Scaling, BringsDominatingDiagonalsNextToOne) {
  SymmetricMatrix matrix = test::laplacian(60, 40, 1);
  Offset k = 0;
  for (Index j = 0; j < matrix.rows; ++j) {
    for (; k < matrix.column_start[Offset{j} + 1]; ++k) {
      // Powers of two and what lies beside them, from 2^-900 up.
      const bool diagonal = matrix.row[k] == j;
      matrix.value[k] = diagonal ? std::ldexp(1 + 0.5 * (j % 2), j % 1800 - 900) : 0.0;
    }
  }
  const std::vector<const SymmetricMatrix*> members{&matrix};
  const MatrixFamily family = unite(members);
  const auto scale = power_of_two_scaling(family, std::array{1.0});
  ASSERT_TRUE(scale.ok());
  for (Index j = 0; j < family.rows; ++j) {
    const double scaled = family.values[0][family.column_start[j]] * (*scale)[j] * (*scale)[j];
    ASSERT_GE(scaled, 0.5) << j;
    ASSERT_LT(scaled, 2) << j;
  }
}

TEST(Scaling, RefusesADiagonalThatOverflows) {
  SymmetricMatrix matrix = test::laplacian(3, 3, 1);
  matrix.value[0] = 1e308;
  const std::vector<const SymmetricMatrix*> members{&matrix};
  const auto scale = power_of_two_scaling(unite(members), std::array{10.0});
  ASSERT_FALSE(scale.ok());
  EXPECT_EQ(scale.status().code(), "scaling-range");
}

TEST(InfinityNorm, IsTheLargestRowSumForAnyNumberOfThreads) {
  const Case given;
  const std::vector<const SymmetricMatrix*> members{&given.first, &given.second};
  const MatrixFamily both = unite(members), one = family_of(given.first.clone());
  Buffer<double> scale(both.rows);
  for (Index i = 0; i < both.rows; ++i) scale[i] = std::ldexp(1.0, i % 5 - 2);
  for (const ShiftedMatrix& matrix :
       {ShiftedMatrix{&both, {1, -0.4}, &scale, 0.3}, ShiftedMatrix{&one, {-1}, &scale, 0.3}}) {
    std::vector<double> row_sum(static_cast<std::size_t>(both.rows), 0.0);
    for (Index j = 0; j < both.rows; ++j) {
      for (Offset k = matrix.family->column_start[j]; k < matrix.family->column_start[Offset{j} + 1]; ++k) {
        const Index i = matrix.family->row[k];
        const double size = std::fabs(matrix.entry(k, i, j) - (i == j ? 0.3 : 0));
        row_sum[static_cast<std::size_t>(i)] += size;
        if (i != j) row_sum[static_cast<std::size_t>(j)] += size;
      }
    }
    const double norm = infinity_norm(matrix), largest = *std::max_element(row_sum.begin(), row_sum.end());
    EXPECT_NEAR(norm, largest, 1e-14 * largest);
    for (const int threads : {2, 3}) {
      ThreadPool pool(threads);
      EXPECT_EQ(infinity_norm(matrix, &pool), norm);
    }
  }
}

}  // namespace
}  // namespace stanchion
