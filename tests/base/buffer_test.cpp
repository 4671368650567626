#include "base/buffer.hpp"

#include <gtest/gtest.h>

#include <limits>
#include <new>
#include <numeric>

namespace stanchion {
namespace {

TEST(Buffer, StartsEmptyAndFills) {
  const Buffer<int> nothing;
  EXPECT_TRUE(nothing.empty());
  EXPECT_EQ(nothing.begin(), nothing.end());
  const Buffer<int> sevens(5, 7);
  EXPECT_EQ(sevens.size(), 5);
  EXPECT_EQ(std::accumulate(sevens.begin(), sevens.end(), 0), 35);
  EXPECT_EQ(Buffer<double>(0).size(), 0);
}

TEST(Buffer, CloneIsIndependent) {
  Buffer<double> original(3, 1.5);
  Buffer<double> copy = original.clone();
  copy[1] = -2;
  EXPECT_EQ(original[1], 1.5);
  EXPECT_EQ(copy[0], 1.5);
  EXPECT_NE(copy.data(), original.data());
  EXPECT_TRUE(Buffer<double>().clone().empty());
}

TEST(Buffer, MovingEmptiesTheSource) {
  Buffer<int> source(4, 9);
  const int* place = source.data();
  Buffer<int> taken(std::move(source));
  EXPECT_EQ(taken.data(), place);
  EXPECT_EQ(taken.size(), 4);
  Buffer<int> assigned(2, 1);
  assigned = std::move(taken);
  EXPECT_EQ(assigned.data(), place);
  EXPECT_EQ(assigned[3], 9);
  taken = Buffer<int>(1, 3);  // a moved-from buffer may be assigned to
  EXPECT_EQ(taken[0], 3);
}

TEST(Buffer, ShrinkKeepsTheFirstElementsAndNeverGrows) {
  Buffer<int> buffer(6);
  std::iota(buffer.begin(), buffer.end(), 0);
  buffer.shrink(4);
  EXPECT_EQ(buffer.size(), 4);
  EXPECT_EQ(buffer[3], 3);
  buffer.shrink(10);
  EXPECT_EQ(buffer.size(), 4);
  buffer.reset();
  EXPECT_TRUE(buffer.empty());
  EXPECT_EQ(buffer.data(), nullptr);
}

TEST(Buffer, SpansCoverEverything) {
  Buffer<int> buffer(3, 2);
  buffer.span()[2] = 5;
  const Buffer<int>& constant = buffer;
  EXPECT_EQ(constant.span().size(), 3U);
  EXPECT_EQ(constant.span().back(), 5);
}

TEST(Buffer, TooLargeThrows) {
  EXPECT_THROW(Buffer<double>{Offset{1} << 60}, std::bad_alloc);
}

TEST(Buffer, LargeOnesHoldEveryElementAndMove) {
  const Offset size = (Offset{9} << 20) / Offset{sizeof(double)} + 1;  // some large pages and a part of one
  Buffer<double> large(size);
  for (Offset i = 0; i < size; ++i) large[i] = static_cast<double>(i);
  Buffer<double> copy = large.clone();
  Buffer<double> moved = std::move(large);
  EXPECT_TRUE(large.empty());  // NOLINT(bugprone-use-after-move): what moving leaves is stated
  for (Offset i = 0; i < size; ++i) {
    ASSERT_EQ(moved[i], static_cast<double>(i));
    ASSERT_EQ(copy[i], static_cast<double>(i));
  }
  moved = Buffer<double>(3, 1.0);  // gives the large one back
  EXPECT_EQ(moved.size(), 3);
  moved = std::move(copy);
  EXPECT_EQ(moved[size - 1], static_cast<double>(size - 1));
}

TEST(Buffer, SizesBeyondAllMemoryTooLargeThrows) {
  EXPECT_THROW(Buffer<double>{Offset{1} << 60}, std::bad_alloc);
  constexpr Offset kMost = std::numeric_limits<Offset>::max();
  EXPECT_THROW(Buffer<double>{kMost}, std::bad_alloc);
}

}  // namespace
}  // namespace stanchion
