#include "dense/trailing_update.hpp"

#include <gtest/gtest.h>

#include <cmath>

#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;

struct Update {
  Index order, column_begin, count;
};

/// The block-lower matrix before and after, with L and W of `count` columns.
struct Updated {
  BlockLayout layout;
  std::vector<double> before, after, lower, scaled;
};

Updated apply(const Update& shape, ThreadPool* team) {
  Random random(101);
  const BlockLayout layout = front_layout(shape.order);
  const auto rows = static_cast<std::size_t>(shape.order - shape.column_begin),
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
  EliminatedColumns columns;
  pack_columns(u.lower.data(), static_cast<Index>(rows), u.scaled.data(), static_cast<Index>(rows) + 3,
               shape.column_begin, shape.order, shape.count, columns);
  update_trailing({layout, u.after.data()}, columns, shape.count, shape.column_begin, team);
  return u;
}

const std::vector<Update> kShapes = {{10, 0, 3},     {10, 4, 1},     {300, 100, 64}, {300, 192, 7},
                                     {700, 200, 56}, {1100, 30, 20}, {450, 191, 33}, {900, 384, 192},
                                     {64, 64, 5},    {50, 10, 0}};

TEST(TrailingUpdate, TakesTheProductOutOfTheNamedColumnsOnly) {
  for (const Update& shape : kShapes) {
    Updated u = apply(shape, nullptr);
    const auto rows = static_cast<std::size_t>(shape.order - shape.column_begin);
    for (Index j = 0; j < shape.order; ++j) {
      const bool inside = j >= shape.column_begin;
      for (Index i = j; i < shape.order; ++i) {
        const auto at = static_cast<std::size_t>(u.layout.offset(i, j));
        if (!inside) {
          ASSERT_EQ(u.after[at], u.before[at]) << i << ", " << j;
          continue;
        }
        long double exact = u.before[at];
        const auto li = static_cast<std::size_t>(i - shape.column_begin),
                   wj = static_cast<std::size_t>(j - shape.column_begin);
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
