#include "dense/block_lower.hpp"

#include <gtest/gtest.h>

#include <vector>

namespace stanchion {
namespace {

void expect_bijective(const BlockLayout& layout) {
  std::vector<char> used(static_cast<std::size_t>(layout.size()), 0);
  for (Index j = 0; j < layout.order; ++j) {
    for (Index i = j; i < layout.order; ++i) {
      const Offset at = layout.offset(i, j);
      ASSERT_TRUE(at >= 0 && at < layout.size()) << i << ", " << j << " of " << layout.order;
      ASSERT_EQ(used[static_cast<std::size_t>(at)]++, 0) << "two entries at one place";
      ASSERT_EQ(at, layout.offset(j, j) + (i - j)) << "a column is contiguous from its diagonal down";
    }
  }
}

void expect_blocks_agree(const BlockLayout& layout) {
  Index covered = 0;
  for (Index b = 0; b < layout.blocks(); ++b) {
    EXPECT_EQ(layout.block_begin(b), covered);
    covered = layout.block_end(b);
    EXPECT_LT(layout.block_begin(b), covered);
    EXPECT_EQ(layout.block_offset(b), layout.offset(layout.block_begin(b), layout.block_begin(b)));
    EXPECT_GE(layout.leading_dimension(b), layout.order - layout.block_begin(b));
    for (Index c = layout.block_begin(b); c < covered; ++c) EXPECT_EQ(layout.block_of(c), b);
    if (b > 0) {
      const Index width = layout.block_end(b - 1) - layout.block_begin(b - 1);
      EXPECT_GE(layout.block_offset(b),
                layout.block_offset(b - 1) + Offset{width} * layout.leading_dimension(b - 1));
    }
  }
  EXPECT_EQ(covered, layout.order);
}

TEST(BlockLayout, FrontLayoutIsBijective) {
  for (Index order = 0; order <= 70; ++order) expect_bijective(front_layout(order));
  for (const Index order : {255, 256, 257, 300, 511, 512, 513, 700, 1025})
    expect_bijective(front_layout(order));
}

TEST(BlockLayout, ContributionLayoutIsBijective) {
  for (Index order = 0; order <= 70; ++order) expect_bijective(contribution_layout(order));
  for (const Index order : {127, 128, 129, 300, 700, 1025}) expect_bijective(contribution_layout(order));
}

TEST(BlockLayout, BlocksFollowEachOtherWithoutOverlap) {
  for (Index order = 1; order <= 1200; order += 13) {
    expect_blocks_agree(front_layout(order));
    expect_blocks_agree(contribution_layout(order));
  }
}

TEST(BlockLayout, AWaitingBlockWastesLittle) {
  for (const Index order : {500, 1000, 2000, 10'000, 40'000}) {
    const double needed = 0.5 * order * (order + 1.0);
    EXPECT_LT(static_cast<double>(contribution_layout(order).size()), 1.15 * needed) << order;
  }
}

TEST(BlockLayout, OffsetsPassThirtyTwoBits) {
  const BlockLayout layout = front_layout(100'000);
  EXPECT_GT(layout.size(), Offset{1} << 32);
  EXPECT_LT(layout.offset(99'999, 99'999), layout.size());
  EXPECT_GT(layout.offset(99'999, 99'999), Offset{4'999'000'000});
}

TEST(BlockLayout, TheExampleOfTheHeader) {
  const BlockLayout layout(5, 2);
  EXPECT_EQ(layout.blocks(), 3);
  EXPECT_EQ(layout.block_end(2), 5);
  EXPECT_EQ(layout.leading_dimension(0), 8);
  EXPECT_EQ(layout.leading_dimension(1), 6);
  EXPECT_EQ(layout.block_offset(1), 16);
  EXPECT_EQ(layout.block_offset(2), 28);
  EXPECT_EQ(layout.size(), 32);
}

}  // namespace
}  // namespace stanchion
