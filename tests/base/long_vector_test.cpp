#include "base/long_vector.hpp"

#include <gtest/gtest.h>

#include <limits>
#include <new>
#include <numeric>
#include <utility>

namespace stanchion {
namespace {

TEST(LongVector, KeepsItsValuesAcrossTheSizeFromWhichPagesAreLarge) {
  LongVector<int> numbers;
  const std::size_t long_enough = std::size_t{3} << 20;  // integers: 12 MiB
  while (numbers.size() < long_enough) numbers.push_back(static_cast<int>(numbers.size()));
  for (std::size_t k = 0; k < numbers.size(); k += 4099) ASSERT_EQ(numbers[k], static_cast<int>(k));
  numbers.resize(10);
  numbers.shrink_to_fit();
  EXPECT_EQ(std::accumulate(numbers.begin(), numbers.end(), 0), 45);
  LongVector<int> other(long_enough, 7);
  std::swap(numbers, other);
  EXPECT_EQ(numbers.size(), long_enough);
  EXPECT_EQ(numbers.back(), 7);
  EXPECT_EQ(other.size(), 10U);
}

TEST(LongVector, RefusesWhatCannotBe) {
  LargePageAllocator<double> allocator;
  EXPECT_THROW((void)allocator.allocate(std::numeric_limits<std::size_t>::max() / 4), std::bad_alloc);
}

}  // namespace
}  // namespace stanchion
