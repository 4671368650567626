#include "sparse/symmetric_matrix.hpp"

#include <gtest/gtest.h>

namespace stanchion {
namespace {

TEST(SymmetricMatrix, FromTripletsFoldsSumsAndSorts) {
  const auto matrix =
      from_triplets(3, {{2, 2, 6}, {0, 1, 0.5}, {1, 0, 0.5}, {0, 0, 4}, {1, 2, 2}, {1, 1, 5}});
  EXPECT_TRUE(check_invariants(matrix));
  EXPECT_EQ(std::vector<Offset>(matrix.column_start.begin(), matrix.column_start.end()),
            (std::vector<Offset>{0, 2, 4, 5}));
  EXPECT_EQ(std::vector<Index>(matrix.row.begin(), matrix.row.end()), (std::vector<Index>{0, 1, 1, 2, 2}));
  EXPECT_EQ(std::vector<double>(matrix.value.begin(), matrix.value.end()),
            (std::vector<double>{4, 1, 5, 2, 6}));
}

TEST(SymmetricMatrix, InvariantsCatchEachBreach) {
  const auto good = from_triplets(2, {{0, 0, 1}, {1, 0, 2}, {1, 1, 3}});
  auto unsorted = good.clone();
  std::swap(unsorted.row[0], unsorted.row[1]);
  EXPECT_FALSE(check_invariants(unsorted));
  auto outside = good.clone();
  outside.row[2] = 2;
  EXPECT_FALSE(check_invariants(outside));
  auto not_finite = good.clone();
  not_finite.value[1] = 1.0 / 0.0;
  EXPECT_FALSE(check_invariants(not_finite));
}

}  // namespace
}  // namespace stanchion
