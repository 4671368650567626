// The kernels that run down a panel: every instruction set against plain loops, and nothing outside is
// touched.
#include <gtest/gtest.h>

#include <cmath>
#include <limits>

#include "dense/kernels.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Random;

using Scalars = ::testing::Types<double, float>;
template <class Scalar>
class WeightedAbsSums : public ::testing::Test {};
TYPED_TEST_SUITE(WeightedAbsSums, Scalars);
template <class Scalar>
class CopyWithAbsSums : public ::testing::Test {};
TYPED_TEST_SUITE(CopyWithAbsSums, Scalars);

template <class Scalar>
std::vector<Scalar> random_values(Random& random, std::size_t count) {
  std::vector<Scalar> values(count);
  for (Scalar& v : values)
    v = static_cast<Scalar>(test::uniform(random, -1, 1) * std::exp2(test::uniform(random, -20, 20)));
  return values;
}

std::size_t place(Index i, Index k, Index leading) {
  return static_cast<std::size_t>(Offset{k} * leading + i);
}

/// Runs check(set, rows, columns, leading) over sets, all row counts to 64 and some more, and odd strides.
template <class Scalar, class Check>
void sweep(const Check& check) {
  const KernelSet<Scalar>* sets[3];
  const int count = kernel_sets(sets);
  for (int s = 0; s < count; ++s) {
    for (Index rows = 0; rows <= 64; ++rows) {
      const Index columns = 1 + rows % 9;
      SCOPED_TRACE(std::string(sets[s]->isa) + ", rows " + std::to_string(rows));
      check(*sets[s], rows, columns, rows + 1 + rows % 4);
    }
    check(*sets[s], 257, kTileWidth, 259);
  }
}

TYPED_TEST(WeightedAbsSums, EqualsThePlainLoopToRounding) {
  using Scalar = TypeParam;
  Random random(124);
  sweep<Scalar>([&](const KernelSet<Scalar>& set, Index rows, Index columns, Index leading) {
    const auto a = random_values<Scalar>(random, place(0, columns, leading));
    std::vector<Scalar> weight = random_values<Scalar>(random, static_cast<std::size_t>(columns));
    for (Scalar& v : weight) v = std::fabs(v);
    for (const bool with_columns : {true, false}) {
      std::vector<Scalar> row_sum(static_cast<std::size_t>(rows) + 1, 3.0),
          column_sum(static_cast<std::size_t>(columns), 5.0);
      set.weighted_abs_sums(a.data(), leading, rows, columns, weight.data(), row_sum.data(),
                            with_columns ? column_sum.data() : nullptr);
      for (Index i = 0; i < rows; ++i) {
        double expected = 3;
        for (Index k = 0; k < columns; ++k)
          expected += std::fabs(a[place(i, k, leading)]) * weight[static_cast<std::size_t>(k)];
        ASSERT_NEAR(row_sum[static_cast<std::size_t>(i)], expected, 900 * Rounding<Scalar>::kUnit * expected);
      }
      ASSERT_EQ(row_sum.back(), 3.0);
      for (Index k = 0; k < columns; ++k) {
        double expected = 5;
        for (Index i = 0; with_columns && i < rows; ++i) expected += std::fabs(a[place(i, k, leading)]);
        ASSERT_NEAR(column_sum[static_cast<std::size_t>(k)], expected,
                    900 * Rounding<Scalar>::kUnit * expected);
      }
    }
  });
}

TYPED_TEST(WeightedAbsSums, ANanPoisonsItsRowAndColumn) {
  using Scalar = TypeParam;
  Random random(125);
  sweep<Scalar>([&](const KernelSet<Scalar>& set, Index rows, Index columns, Index leading) {
    if (rows == 0) return;
    auto a = random_values<Scalar>(random, place(0, columns, leading));
    a[place(rows - 1, columns - 1, leading)] = std::numeric_limits<Scalar>::quiet_NaN();
    std::vector<Scalar> weight(static_cast<std::size_t>(columns), 1.0),
        row_sum(static_cast<std::size_t>(rows)), column_sum(static_cast<std::size_t>(columns));
    set.weighted_abs_sums(a.data(), leading, rows, columns, weight.data(), row_sum.data(), column_sum.data());
    for (Index i = 0; i < rows; ++i)
      ASSERT_EQ(std::isnan(row_sum[static_cast<std::size_t>(i)]), i == rows - 1);
    for (Index k = 0; k < columns; ++k)
      ASSERT_EQ(std::isnan(column_sum[static_cast<std::size_t>(k)]), k == columns - 1);
  });
}

TYPED_TEST(CopyWithAbsSums, CopiesForwardEvenOntoItself) {
  using Scalar = TypeParam;
  Random random(126);
  sweep<Scalar>([&](const KernelSet<Scalar>& set, Index rows, Index, Index) {
    for (const Index shift : {0, 1, 3, 8, 70}) {
      std::vector<Scalar> memory = random_values<Scalar>(random, static_cast<std::size_t>(rows + shift));
      const std::vector<Scalar> before = memory;
      std::vector<Scalar> row_sum(static_cast<std::size_t>(rows) + 1, 2.0);
      const Scalar total = set.copy_with_abs_sums(memory.data() + shift, rows, memory.data(), row_sum.data());
      double expected = 0;
      for (Index i = 0; i < rows; ++i) {
        const Scalar moved = before[static_cast<std::size_t>(i + shift)];
        ASSERT_EQ(memory[static_cast<std::size_t>(i)], moved);
        ASSERT_EQ(row_sum[static_cast<std::size_t>(i)], Scalar{2} + std::fabs(moved));
        expected += std::fabs(moved);
      }
      ASSERT_NEAR(total, expected, 900 * Rounding<Scalar>::kUnit * expected);
      ASSERT_EQ(row_sum.back(), 2.0);
      for (Index i = std::max(rows, shift); i < rows + shift; ++i) {
        ASSERT_EQ(memory[static_cast<std::size_t>(i)], before[static_cast<std::size_t>(i)]);
      }
    }
  });
}

}  // namespace
}  // namespace stanchion
