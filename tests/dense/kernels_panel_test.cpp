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

constexpr double kGuard = -777.5;

std::vector<double> random_values(Random& random, std::size_t count) {
  std::vector<double> values(count);
  for (double& v : values) v = test::uniform(random, -1, 1) * std::exp2(test::uniform(random, -20, 20));
  return values;
}

std::vector<double> random_signs(Random& random, Index count) {
  std::vector<double> signs(static_cast<std::size_t>(count));
  for (double& v : signs) v = test::uniform(random, -1, 1) < 0 ? -1 : 1;
  return signs;
}

std::size_t place(Index i, Index k, Index leading) {
  return static_cast<std::size_t>(Offset{k} * leading + i);
}

/// Runs check(set, rows, columns, leading) over sets, all row counts to 64 and some more, and odd strides.
template <class Check>
void sweep(const Check& check) {
  const Kernels* sets[3];
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

TEST(ColumnAbsMax, EqualsThePlainLoop) {
  Random random(121);
  sweep([&](const Kernels& set, Index rows, Index columns, Index leading) {
    const auto w = random_values(random, place(0, columns, leading));
    std::vector<double> out(static_cast<std::size_t>(columns) + 1, kGuard);
    set.column_abs_max(w.data(), leading, rows, columns, out.data());
    for (Index k = 0; k < columns; ++k) {
      double largest = 0;
      for (Index i = 0; i < rows; ++i) largest = std::max(largest, std::fabs(w[place(i, k, leading)]));
      ASSERT_EQ(out[static_cast<std::size_t>(k)], largest);
    }
    ASSERT_EQ(out.back(), kGuard);
  });
}

TEST(ColumnAbsMax, NanAndInfinityAnywhereMakeTheirColumnInfinite) {
  constexpr double kInfinity = std::numeric_limits<double>::infinity();
  Random random(122);
  sweep([&](const Kernels& set, Index rows, Index columns, Index leading) {
    if (rows == 0) return;
    for (const double bad : {kInfinity, -kInfinity, std::numeric_limits<double>::quiet_NaN()}) {
      for (const Index row : {Index{0}, rows / 2, rows - 1}) {
        auto w = random_values(random, place(0, columns, leading));
        w[place(row, columns - 1, leading)] = bad;
        std::vector<double> out(static_cast<std::size_t>(columns));
        set.column_abs_max(w.data(), leading, rows, columns, out.data());
        for (Index k = 0; k < columns; ++k)
          ASSERT_EQ(out[static_cast<std::size_t>(k)] == kInfinity, k == columns - 1);
      }
    }
  });
}

/// Pivots of every kind in turn: 1x1, a pair, zero.
struct MixedPivots {
  std::vector<double> diagonal, off_diagonal;
  std::vector<PivotKind> kind;

  MixedPivots(Random& random, Index columns)
      : diagonal(static_cast<std::size_t>(columns)),
        off_diagonal(diagonal.size()),
        kind(diagonal.size(), PivotKind::kOne) {
    for (std::size_t k = 0; k < diagonal.size(); ++k) {
      diagonal[k] = test::uniform(random, 0.1, 0.6) * (random() % 2 ? 1 : -1);
      if (k % 4 == 1 && k + 1 < diagonal.size()) {
        kind[k] = PivotKind::kTwoFirst;
        kind[k + 1] = PivotKind::kTwoSecond;
        off_diagonal[k] = random() % 2 ? 1 : -1.5;
        diagonal[k + 1] = test::uniform(random, -0.6, 0.6);
        ++k;
      } else if (k % 4 == 3) {
        kind[k] = PivotKind::kZero;
        diagonal[k] = 0;
      }
    }
  }
};

TEST(DivideByPivots, SolvesEveryRowAndSumsTheColumns) {
  Random random(123);
  sweep([&](const Kernels& set, Index rows, Index columns, Index leading) {
    MixedPivots d(random, columns);
    const auto w = random_values(random, place(0, columns, leading));
    const Index leading_l = leading + 2;
    std::vector<double> l(place(0, columns, leading_l), kGuard), sum(static_cast<std::size_t>(columns), 10.0);
    std::vector<double> signed_sum(static_cast<std::size_t>(columns), -3.0);
    const auto sign = random_signs(random, rows);
    set.divide_by_pivots(w.data(), leading, l.data(), leading_l, rows, columns,
                         {d.diagonal.data(), d.off_diagonal.data(), d.kind.data()}, sign.data(), sum.data(),
                         signed_sum.data());
    for (Index k = 0; k < columns; ++k) {
      const auto kk = static_cast<std::size_t>(k);
      double expected_sum = 10, expected_signed_sum = -3;
      for (Index i = 0; i < rows; ++i) {
        const double value = l[place(i, k, leading_l)];
        expected_sum += std::fabs(value);
        expected_signed_sum += value * sign[static_cast<std::size_t>(i)];
        if (d.kind[kk] == PivotKind::kZero) {
          ASSERT_EQ(value, 0);
        } else if (d.kind[kk] == PivotKind::kOne) {
          const double exact = w[place(i, k, leading)] / d.diagonal[kk];
          ASSERT_NEAR(value, exact, 0x1p-51 * std::fabs(exact));
        } else if (d.kind[kk] == PivotKind::kTwoFirst) {
          const double next = l[place(i, k + 1, leading_l)], b = d.off_diagonal[kk];
          const double size = 0x1p-48 * std::fabs(b) * (std::fabs(value) + std::fabs(next));
          ASSERT_NEAR(d.diagonal[kk] * value + b * next, w[place(i, k, leading)], size);
          ASSERT_NEAR(b * value + d.diagonal[kk + 1] * next, w[place(i, k + 1, leading)], size);
        }
      }
      ASSERT_NEAR(sum[kk], expected_sum, 1e-13 * expected_sum);
      ASSERT_NEAR(signed_sum[kk], expected_signed_sum, 1e-13 * expected_sum);
      for (Index i = rows; i < leading_l; ++i) ASSERT_EQ(l[place(i, k, leading_l)], kGuard);
    }
  });
}

TEST(WeightedAbsSums, EqualsThePlainLoopToRounding) {
  Random random(124);
  sweep([&](const Kernels& set, Index rows, Index columns, Index leading) {
    const auto a = random_values(random, place(0, columns, leading));
    std::vector<double> weight = random_values(random, static_cast<std::size_t>(columns));
    for (double& v : weight) v = std::fabs(v);
    for (const bool with_columns : {true, false}) {
      std::vector<double> row_sum(static_cast<std::size_t>(rows) + 1, 3.0),
          column_sum(static_cast<std::size_t>(columns), 5.0);
      set.weighted_abs_sums(a.data(), leading, rows, columns, weight.data(), row_sum.data(),
                            with_columns ? column_sum.data() : nullptr);
      for (Index i = 0; i < rows; ++i) {
        double expected = 3;
        for (Index k = 0; k < columns; ++k)
          expected += std::fabs(a[place(i, k, leading)]) * weight[static_cast<std::size_t>(k)];
        ASSERT_NEAR(row_sum[static_cast<std::size_t>(i)], expected, 1e-13 * expected);
      }
      ASSERT_EQ(row_sum.back(), 3.0);
      for (Index k = 0; k < columns; ++k) {
        double expected = 5;
        for (Index i = 0; with_columns && i < rows; ++i) expected += std::fabs(a[place(i, k, leading)]);
        ASSERT_NEAR(column_sum[static_cast<std::size_t>(k)], expected, 1e-13 * expected);
      }
    }
  });
}

TEST(WeightedAbsSums, ANanPoisonsItsRowAndColumn) {
  Random random(125);
  sweep([&](const Kernels& set, Index rows, Index columns, Index leading) {
    if (rows == 0) return;
    auto a = random_values(random, place(0, columns, leading));
    a[place(rows - 1, columns - 1, leading)] = std::numeric_limits<double>::quiet_NaN();
    std::vector<double> weight(static_cast<std::size_t>(columns), 1.0),
        row_sum(static_cast<std::size_t>(rows)), column_sum(static_cast<std::size_t>(columns));
    set.weighted_abs_sums(a.data(), leading, rows, columns, weight.data(), row_sum.data(), column_sum.data());
    for (Index i = 0; i < rows; ++i)
      ASSERT_EQ(std::isnan(row_sum[static_cast<std::size_t>(i)]), i == rows - 1);
    for (Index k = 0; k < columns; ++k)
      ASSERT_EQ(std::isnan(column_sum[static_cast<std::size_t>(k)]), k == columns - 1);
  });
}

TEST(CopyWithAbsSums, CopiesForwardEvenOntoItself) {
  Random random(126);
  sweep([&](const Kernels& set, Index rows, Index, Index) {
    for (const Index shift : {0, 1, 3, 8, 70}) {
      std::vector<double> memory = random_values(random, static_cast<std::size_t>(rows + shift));
      const std::vector<double> before = memory;
      std::vector<double> row_sum(static_cast<std::size_t>(rows) + 1, 2.0);
      const double total = set.copy_with_abs_sums(memory.data() + shift, rows, memory.data(), row_sum.data());
      double expected = 0;
      for (Index i = 0; i < rows; ++i) {
        const double moved = before[static_cast<std::size_t>(i + shift)];
        ASSERT_EQ(memory[static_cast<std::size_t>(i)], moved);
        ASSERT_EQ(row_sum[static_cast<std::size_t>(i)], 2.0 + std::fabs(moved));
        expected += std::fabs(moved);
      }
      ASSERT_NEAR(total, expected, 1e-13 * expected);
      ASSERT_EQ(row_sum.back(), 2.0);
      for (Index i = std::max(rows, shift); i < rows + shift; ++i) {
        ASSERT_EQ(memory[static_cast<std::size_t>(i)], before[static_cast<std::size_t>(i)]);
      }
    }
  });
}

TEST(AddGrowthAndImage, EqualsThePlainLoopToRounding) {
  Random random(128);
  sweep([&](const Kernels& set, Index rows, Index columns, Index leading) {
    const auto a = random_values(random, place(0, columns, leading));
    const auto weight = random_values(random, static_cast<std::size_t>(columns));
    const auto step = random_values(random, static_cast<std::size_t>(columns));
    std::vector<double> growth(static_cast<std::size_t>(rows) + 1, kGuard), image(growth);
    set.add_growth_and_image(a.data(), leading, rows, columns, weight.data(), step.data(), growth.data(),
                             image.data());
    for (Index i = 0; i < rows; ++i) {
      double expected_growth = kGuard, expected_image = kGuard, size = std::fabs(kGuard);
      for (Index k = 0; k < columns; ++k) {
        const double value = a[place(i, k, leading)];
        expected_growth += std::fabs(value) * weight[static_cast<std::size_t>(k)];
        expected_image += value * step[static_cast<std::size_t>(k)];
        size += std::fabs(value) * (std::fabs(weight[static_cast<std::size_t>(k)]) +
                                    std::fabs(step[static_cast<std::size_t>(k)]));
      }
      ASSERT_NEAR(growth[static_cast<std::size_t>(i)], expected_growth, 1e-13 * size);
      ASSERT_NEAR(image[static_cast<std::size_t>(i)], expected_image, 1e-13 * size);
    }
    ASSERT_EQ(growth.back(), kGuard);
    ASSERT_EQ(image.back(), kGuard);
  });
}

TEST(KernelSets, AgreeWithTheReferenceToRounding) {
  Random random(127);
  const Kernels* sets[3];
  const int count = kernel_sets(sets);
  for (Index rows = 1; rows <= 64; ++rows) {
    const auto w = random_values(random, place(0, 8, rows));
    MixedPivots d(random, 8);
    std::vector<double> expected(w.size());
    for (int s = 0; s < count; ++s) {
      std::vector<double> l(w.size()), sum(8, 0.0), signed_sum(8, 0.0), sign(w.size(), 1.0);
      sets[s]->divide_by_pivots(w.data(), rows, l.data(), rows, rows, 8,
                                {d.diagonal.data(), d.off_diagonal.data(), d.kind.data()}, sign.data(),
                                sum.data(), signed_sum.data());
      if (s == 0) expected = l;
      double largest = 0;
      for (const double v : expected) largest = std::max(largest, std::fabs(v));
      for (std::size_t i = 0; i < l.size(); ++i)
        ASSERT_NEAR(l[i], expected[i], 1e-14 * largest) << sets[s]->isa;
    }
  }
}

}  // namespace
}  // namespace stanchion
