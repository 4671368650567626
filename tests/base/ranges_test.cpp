#include "base/ranges.hpp"

#include <gtest/gtest.h>

#include <atomic>
#include <vector>

namespace stanchion {
namespace {

TEST(ForRanges, CoversEveryIndexOnceInRunsOfTheGrain) {
  ThreadPool pool(3);
  for (const Offset size : {0, 1, 7, 8, 9, 64, 1001}) {
    std::vector<std::atomic<int>> visits(static_cast<std::size_t>(size));
    for_ranges(pool, size, 8, [&](Offset begin, Offset end) {
      EXPECT_EQ(begin % 8, 0);
      EXPECT_TRUE(end == size || end == begin + 8);
      for (Offset i = begin; i < end; ++i) ++visits[static_cast<std::size_t>(i)];
    });
    for (const auto& count : visits) EXPECT_EQ(count, 1);
  }
}

}  // namespace
}  // namespace stanchion
