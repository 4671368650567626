#include "base/checked.hpp"

#include <gtest/gtest.h>

namespace stanchion {
namespace {

constexpr Offset kLargestIndex = std::numeric_limits<Index>::max();
constexpr Offset kLargestOffset = std::numeric_limits<Offset>::max();

TEST(ToIndex, AcceptsExactlyTheNonNegativeIndices) {
  EXPECT_EQ(to_index(0), 0);
  EXPECT_EQ(to_index(kLargestIndex), kLargestIndex);
  EXPECT_FALSE(to_index(kLargestIndex + 1));
  EXPECT_FALSE(to_index(-1));
  EXPECT_FALSE(to_index(Offset{1} << 32)) << "must not wrap to 0";
  EXPECT_FALSE(to_index(kLargestOffset));
}

TEST(CheckedProduct, FindsTheEdgeOfOverflow) {
  EXPECT_EQ(checked_product(3, 4), 12);
  EXPECT_EQ(checked_product(-3, 4), -12);
  EXPECT_EQ(checked_product(0, kLargestOffset), 0);
  EXPECT_EQ(checked_product(1, kLargestOffset), kLargestOffset);
  EXPECT_FALSE(checked_product(2, kLargestOffset));
  EXPECT_EQ(checked_product(Offset{1} << 31, Offset{1} << 31), Offset{1} << 62);
  EXPECT_FALSE(checked_product(Offset{1} << 32, Offset{1} << 31));
  EXPECT_EQ(checked_product(-(Offset{1} << 32), Offset{1} << 31), std::numeric_limits<Offset>::min());
}

}  // namespace
}  // namespace stanchion
