#include "dense/trailing_update.hpp"

#include <gtest/gtest.h>

#include <cmath>

#include "dense/blas.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;

struct Update {
  Index order, first_row, count, column_begin, column_end;
};

/// The block-lower matrix before and after, with L and W of `count` columns.
struct Updated {
  BlockLayout layout;
  std::vector<double> before, after, lower, scaled;
};

Updated apply(const Update& shape, ThreadPool* team) {
  use_single_threaded_blas();
  Random random(101);
  const BlockLayout layout = front_layout(shape.order);
  const auto rows = static_cast<std::size_t>(shape.order - shape.first_row),
             count = static_cast<std::size_t>(shape.count);
  Updated u{layout,
            std::vector<double>(static_cast<std::size_t>(layout.size())),
            {},
            std::vector<double>(rows * count),
            std::vector<double>((rows + 3) * count)};
  for (auto* values : {&u.before, &u.lower, &u.scaled}) {
    for (double& v : *values) v = test::uniform(random, -1, 1);
  }
  u.after = u.before;
  update_trailing({layout, u.after.data()},
                  {u.lower.data(), static_cast<Index>(rows), u.scaled.data(), static_cast<Index>(rows) + 3,
                   shape.first_row, shape.count},
                  shape.column_begin, shape.column_end, team);
  return u;
}

const std::vector<Update> kShapes = {
    {10, 0, 3, 0, 10},        {10, 4, 1, 4, 7},         {300, 100, 64, 100, 256}, {300, 256, 7, 256, 300},
    {700, 200, 56, 256, 700}, {1100, 30, 20, 30, 1100}, {64, 64, 5, 64, 64},      {50, 10, 0, 10, 50}};

TEST(TrailingUpdate, TakesTheProductOutOfTheNamedColumnsOnly) {
  for (const Update& shape : kShapes) {
    Updated u = apply(shape, nullptr);
    const auto rows = static_cast<std::size_t>(shape.order - shape.first_row);
    for (Index j = 0; j < shape.order; ++j) {
      const bool inside = j >= shape.column_begin && j < shape.column_end;
      for (Index i = j; i < shape.order; ++i) {
        const auto at = static_cast<std::size_t>(u.layout.offset(i, j));
        if (!inside) {
          ASSERT_EQ(u.after[at], u.before[at]) << i << ", " << j;
          continue;
        }
        long double exact = u.before[at];
        const auto li = static_cast<std::size_t>(i - shape.first_row),
                   wj = static_cast<std::size_t>(j - shape.first_row);
        for (std::size_t k = 0; k < static_cast<std::size_t>(shape.count); ++k) {
          exact -= static_cast<long double>(u.lower[li + k * rows]) * u.scaled[wj + k * (rows + 3)];
        }
        ASSERT_NEAR(u.after[at], static_cast<double>(exact), 1e-13)
            << i << ", " << j << " of " << shape.order;
      }
    }
  }
}

TEST(TrailingUpdate, AnyTeamGivesTheSameBits) {
  ThreadPool two(2), three(3);
  for (const Update& shape : kShapes) {
    const Updated alone = apply(shape, nullptr), pair = apply(shape, &two), trio = apply(shape, &three);
    EXPECT_EQ(alone.after, pair.after);
    EXPECT_EQ(alone.after, trio.after);
  }
}

}  // namespace
}  // namespace stanchion
