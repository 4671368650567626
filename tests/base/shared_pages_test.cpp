#include "base/shared_pages.hpp"

#include <gtest/gtest.h>

#include <cstdint>
#include <limits>
#include <vector>

namespace stanchion {
namespace {

TEST(SharedPages, BlocksKeepWhatIsWrittenThoughOthersAreDropped) {
  SharedPages pages;
  struct Held {
    std::shared_ptr<std::uint64_t> block;
    Offset size;
  };
  std::vector<Held> held;
  for (std::uint64_t k = 0; k < 4000; ++k) {
    const Offset size = static_cast<Offset>(k * k % 9973);
    held.push_back({pages.take<std::uint64_t>(size), size});
    for (Offset i = 0; i < size; ++i) held.back().block.get()[i] = k;
    if (k % 3 == 0) held[k / 2].block.reset();
  }
  for (std::uint64_t k = 0; k < held.size(); ++k) {
    if (!held[k].block) continue;
    for (Offset i = 0; i < held[k].size; ++i) ASSERT_EQ(held[k].block.get()[i], k);
  }
}

TEST(SharedPages, BlocksOutliveTheStore) {
  std::shared_ptr<char> small, large;
  {
    SharedPages pages;
    small = pages.take<char>(3);
    large = pages.take<char>(Offset{5} << 20);
  }
  small.get()[2] = 'x';
  large.get()[(Offset{5} << 20) - 1] = 'y';
  EXPECT_EQ(small.get()[2], 'x');
}

TEST(SharedPages, APageWithoutBlocksIsUsedAgain) {
  SharedPages pages;
  const double* first = pages.take<double>(100).get();
  const std::shared_ptr<double> again = pages.take<double>(100);
  EXPECT_EQ(again.get(), first);
  EXPECT_NE(pages.take<double>(100).get(), first);
}

TEST(SharedPages, BlocksAreApartByCacheLines) {
  SharedPages pages;
  const auto a = pages.take<char>(1), b = pages.take<char>(1);
  if (kLargePagesFrom == std::numeric_limits<std::size_t>::max()) GTEST_SKIP() << "blocks of their own";
  EXPECT_EQ(b.get() - a.get(), 64);
}

TEST(SharedPages, AbsurdSizesThrow) {
  SharedPages pages;
  EXPECT_THROW(pages.take<double>(std::numeric_limits<Offset>::max()), std::bad_alloc);
  EXPECT_THROW(pages.take<double>(-1), std::bad_alloc);
}

}  // namespace
}  // namespace stanchion
