#include "io/strike.hpp"

#include <gtest/gtest.h>

#include "matrices.hpp"

namespace stanchion {
namespace {

TEST(Strike, RowsAndColumnsGoAndTheMapLeadsBack) {
  const auto matrix = from_triplets(
      4, {{0, 0, 4}, {1, 0, 1}, {1, 1, 5}, {2, 0, 7}, {2, 1, 2}, {2, 2, 6}, {3, 2, 8}, {3, 3, 9}});
  const auto map = strike_map(4, {1, 1});
  ASSERT_TRUE(map.ok());
  EXPECT_EQ(map->original, (std::vector<Index>{0, 2, 3}));
  EXPECT_EQ(map->reduced, (std::vector<Index>{0, -1, 1, 2}));
  EXPECT_EQ(map->struck(), 1);
  ThreadPool pool(2);
  const auto reduced = strike(matrix, *map, pool);
  ASSERT_TRUE(reduced.ok());
  EXPECT_TRUE(check_invariants(*reduced));
  EXPECT_TRUE(
      testing::same(*reduced, from_triplets(3, {{0, 0, 4}, {1, 0, 7}, {1, 1, 6}, {2, 1, 8}, {2, 2, 9}})));
  EXPECT_EQ(renumber({0, 1, 3}, *map), (std::vector<Index>{0, 2}));
}

TEST(Strike, MatchesADenseStrikeOnLargerMatrices) {
  const auto matrix = testing::scattered(9000, 3, 5);
  std::vector<Index> remove;
  for (Index i = 0; i < 9000; i += 3) remove.push_back(i);
  const auto map = strike_map(9000, remove);
  std::vector<Triplet> kept;
  for (Index column = 0; column < 9000; ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      const Index row = matrix.row[k];
      if (row % 3 != 0 && column % 3 != 0)
        kept.push_back({row - row / 3 - 1, column - column / 3 - 1, matrix.value[k]});
    }
  }
  const auto wanted = from_triplets(6000, kept);
  for (const int threads : {1, 3}) {
    ThreadPool pool(threads);
    EXPECT_TRUE(testing::same(*strike(matrix, *map, pool), wanted));
  }
}

TEST(Strike, NothingLeftAndMistakesAreReported) {
  EXPECT_EQ(strike_map(2, {0, 1}).status().code(), "nothing-left");
  EXPECT_EQ(strike_map(2, {2}).status().kind(), StatusKind::kInternal);
  ThreadPool pool(1);
  EXPECT_EQ(strike(from_triplets(3, {}), *strike_map(2, {}), pool).status().kind(), StatusKind::kInternal);
}

TEST(Strike, IdentityRowsAreOnesWithoutNeighbours) {
  const auto matrix =
      from_triplets(5, {{0, 0, 1}, {1, 1, 1}, {2, 1, 3}, {2, 2, 1}, {3, 3, 2}, {4, 3, 0}, {4, 4, 1}});
  EXPECT_EQ(identity_rows(matrix), (std::vector<Index>{0, 4}));
}

}  // namespace
}  // namespace stanchion
