#include "base/arena.hpp"

#include <gtest/gtest.h>

#include <algorithm>
#include <cstdint>
#include <new>
#include <random>
#include <vector>

namespace stanchion {
namespace {

bool aligned(const double* block) {
  return reinterpret_cast<std::uintptr_t>(block) % 64 == 0;
}

TEST(Arena, BlocksAreAlignedAndDoNotOverlap) {
  Arena arena(10'000);
  std::vector<std::pair<double*, Offset>> blocks;
  for (Offset count = 0; count < 130; ++count) {
    double* block = arena.push(count);
    ASSERT_NE(block, nullptr);
    EXPECT_TRUE(aligned(block));
    for (Offset i = 0; i < count; ++i) block[i] = static_cast<double>(count);
    blocks.push_back({block, count});
  }
  for (const auto& [block, count] : blocks) {
    for (Offset i = 0; i < count; ++i) ASSERT_EQ(block[i], static_cast<double>(count));
  }
}

TEST(Arena, LastInFirstOut) {
  Arena arena(1000);
  double* first = arena.push(100);
  double* second = arena.push(50);
  arena.pop_to(second);
  EXPECT_EQ(arena.top(), second);
  EXPECT_EQ(arena.push(8), second);
  arena.pop_to(first);
  EXPECT_EQ(arena.used(), 0);
  EXPECT_EQ(arena.push(1), first);
  EXPECT_EQ(arena.used(), 8);
}

TEST(Arena, HighWaterRemembersTheDeepestMoment) {
  Arena arena(1000);
  double* bottom = arena.push(64);
  arena.push(800);
  arena.pop_to(bottom);
  arena.push(16);
  EXPECT_EQ(arena.high_water(), 864);
  EXPECT_EQ(arena.used(), 16);
}

TEST(Arena, FullGivesNullAndChangesNothing) {
  Arena arena(1000);
  double* block = arena.push(1000);
  ASSERT_NE(block, nullptr);
  const Offset used = arena.used(), high = arena.high_water();
  EXPECT_EQ(arena.push(Offset{1} << 40), nullptr);
  EXPECT_EQ(arena.used(), used);
  EXPECT_EQ(arena.high_water(), high);
  EXPECT_NE(arena.push(8), nullptr);
}

TEST(Arena, FillsUpInTheEnd) {
  Arena arena(512);
  Offset taken = 0;
  while (arena.push(4096) != nullptr) {
    taken += 4096;
    ASSERT_LT(taken, Offset{1} << 24) << "a small arena must end somewhere";
  }
  EXPECT_GE(taken, 512);
}

TEST(Arena, TheAskedSizeIsAlwaysThere) {
  for (const Offset doubles : {Offset{0}, Offset{1}, Offset{511}, Offset{4097}, Offset{3'000'001}}) {
    Arena arena(doubles);
    double* block = arena.push(doubles);
    ASSERT_NE(block, nullptr);
    if (doubles > 0) {
      block[0] = 1;
      block[doubles - 1] = 2;
      EXPECT_EQ(block[doubles - 1], 2);
    }
  }
}

TEST(Arena, TrimmingKeepsWhatIsInUseAndGivesTheRestBack) {
  constexpr Offset kLargePage = Offset{2} << 17;  // in doubles
  Arena arena(8 * kLargePage);
  double* used = arena.push(1000);
  double* beyond = arena.push(4 * kLargePage);
  std::fill(used, beyond + 4 * kLargePage, 7.0);
  arena.pop_to(beyond);
  arena.trim();
  EXPECT_EQ(arena.high_water(), 1000);
  ASSERT_EQ(arena.push(4 * kLargePage), beyond);
  EXPECT_EQ(std::count(used, used + 1000, 7.0), 1000);
  // Pages that went back are empty when they return; at most one large page stayed.
  EXPECT_LT(std::count(beyond, beyond + 4 * kLargePage, 7.0), kLargePage);
}

TEST(Arena, MovingTakesTheStackAlong) {
  Arena arena(100);
  double* block = arena.push(20);
  block[19] = 3.5;
  Arena moved(std::move(arena));
  EXPECT_EQ(moved.used(), 24);
  EXPECT_EQ(block[19], 3.5);
  EXPECT_EQ(moved.push(1), block + 24);
}

TEST(Arena, MoreThanTheAddressSpaceThrows) {
  EXPECT_THROW(Arena(Offset{1} << 50), std::bad_alloc);
  EXPECT_THROW(Arena(Offset{1} << 58), std::bad_alloc) << "the byte count must not wrap around";
}

TEST(Arena, RandomStackDiscipline) {
  std::mt19937 random(5);
  Arena arena(50'000);
  std::vector<std::pair<double*, Offset>> stack;
  for (int step = 0; step < 20'000; ++step) {
    if (stack.empty() || (random() % 5 < 3 && stack.size() < 60)) {
      const auto count = static_cast<Offset>(1 + random() % 300);
      double* block = arena.push(count);
      ASSERT_NE(block, nullptr);
      block[0] = block[count - 1] = static_cast<double>(stack.size());
      stack.push_back({block, count});
    } else {
      const std::size_t level = random() % stack.size();
      for (std::size_t i = level; i < stack.size(); ++i) {
        ASSERT_EQ(stack[i].first[stack[i].second - 1], static_cast<double>(i));
      }
      arena.pop_to(stack[level].first);
      stack.resize(level);
    }
  }
}

}  // namespace
}  // namespace stanchion
