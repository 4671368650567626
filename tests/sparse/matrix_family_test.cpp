#include "sparse/matrix_family.hpp"

#include <gtest/gtest.h>

#include <algorithm>
#include <numeric>
#include <random>

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

}  // namespace
}  // namespace stanchion
