#include "base/page_store.hpp"

#include <gtest/gtest.h>

#include <cstdint>
#include <new>
#include <utility>

namespace stanchion {
namespace {

TEST(PageStore, PiecesKeepWhatIsWrittenAndDoNotOverlap) {
  PageStore store;
  std::vector<std::span<std::uint64_t>> pieces;
  for (std::uint64_t k = 0; k < 3000; ++k) {
    pieces.push_back(store.take<std::uint64_t>(static_cast<Offset>(k * k % 997)));
    for (std::uint64_t& word : pieces.back()) word = k;
  }
  for (std::uint64_t k = 0; k < pieces.size(); ++k) {
    ASSERT_EQ(pieces[k].size(), k * k % 997);
    for (const std::uint64_t word : pieces[k]) ASSERT_EQ(word, k);
  }
}

TEST(PageStore, PiecesStayWhereTheyAreWhenTheStoreMoves) {
  PageStore store;
  const std::span<int> small = store.take<int>(3);
  const std::span<char> large = store.take<char>(Offset{40} << 20);  // more than any block of its own
  small[2] = 7;
  large.back() = 'x';
  const PageStore moved = std::move(store);
  EXPECT_EQ(small[2], 7);
  EXPECT_EQ(large.back(), 'x');
}

TEST(PageStore, ManyTypesAreAligned) {
  PageStore store;
  for (int k = 1; k < 100; ++k) {
    store.take<char>(k);
    EXPECT_EQ(reinterpret_cast<std::uintptr_t>(store.take<double>(k).data()) % alignof(double), 0U);
  }
  EXPECT_TRUE(store.take<double>(0).empty());
}

TEST(PageStore, TooMuchIsBadAllocTooLargeThrows) {
  PageStore store;
  EXPECT_THROW(store.take<double>(std::numeric_limits<Offset>::max()), std::bad_alloc);
  EXPECT_THROW(store.take<double>(std::numeric_limits<Offset>::max() / 16), std::bad_alloc);
  EXPECT_EQ(store.take<int>(5).size(), 5U) << "and it still serves";
}

}  // namespace
}  // namespace stanchion
