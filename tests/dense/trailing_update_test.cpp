#include "dense/trailing_update.hpp"

#include <gtest/gtest.h>

#include <cmath>

#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;

using Scalars = ::testing::Types<double, float>;
template <class Scalar>
class TrailingUpdate : public ::testing::Test {};
TYPED_TEST_SUITE(TrailingUpdate, Scalars);

struct Update {
  Index order, column_begin, count;
};

/// The block-lower matrix before and after, with L and W of `count` columns.
template <class Scalar>
struct Updated {
  BlockLayout layout;
  std::vector<Scalar> before, after, lower, scaled;
};

template <class Scalar>
Updated<Scalar> apply(const Update& shape, ThreadPool* team) {
  Random random(101);
  const BlockLayout layout = front_layout(shape.order);
  const auto rows = static_cast<std::size_t>(shape.order - shape.column_begin),
             count = static_cast<std::size_t>(shape.count);
  Updated<Scalar> u{layout,
                    std::vector<Scalar>(static_cast<std::size_t>(layout.size())),
                    {},
                    std::vector<Scalar>(rows * count),
                    std::vector<Scalar>((rows + 3) * count)};
  for (auto* values : {&u.before, &u.lower, &u.scaled}) {
    for (Scalar& v : *values) v = static_cast<Scalar>(test::uniform(random, -1, 1));
  }
  u.after = u.before;
  EliminatedColumnsOf<Scalar> columns;
  pack_columns(u.lower.data(), static_cast<Index>(rows), u.scaled.data(), static_cast<Index>(rows) + 3,
               shape.column_begin, shape.order, shape.count, columns);
  update_trailing(BlockLowerOf<Scalar>{layout, u.after.data()}, columns, shape.count, shape.column_begin,
                  team);
  return u;
}

const std::vector<Update> kShapes = {{10, 0, 3},     {10, 4, 1},     {300, 100, 64}, {300, 192, 7},
                                     {700, 200, 56}, {1100, 30, 20}, {450, 191, 33}, {900, 384, 192},
                                     {64, 64, 5},    {50, 10, 0}};

TYPED_TEST(TrailingUpdate, TakesTheProductOutOfTheNamedColumnsOnly) {
  using Scalar = TypeParam;
  for (const Update& shape : kShapes) {
    Updated<Scalar> u = apply<Scalar>(shape, nullptr);
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
        ASSERT_NEAR(u.after[at], static_cast<double>(exact), 900 * Rounding<Scalar>::kUnit)
            << i << ", " << j << " of " << shape.order;
      }
    }
  }
}

TYPED_TEST(TrailingUpdate, AnyTeamGivesTheSameBits) {
  using Scalar = TypeParam;
  ThreadPool two(2), three(3);
  for (const Update& shape : kShapes) {
    const Updated<Scalar> alone = apply<Scalar>(shape, nullptr), pair = apply<Scalar>(shape, &two),
                          trio = apply<Scalar>(shape, &three);
    EXPECT_EQ(alone.after, pair.after);
    EXPECT_EQ(alone.after, trio.after);
  }
}

}  // namespace
}  // namespace stanchion
