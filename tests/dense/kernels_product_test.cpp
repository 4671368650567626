// The products on packed operands and the loops over them: every instruction set against plain loops, and
// nothing outside is touched.
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
class PackedStrips : public ::testing::Test {};
TYPED_TEST_SUITE(PackedStrips, Scalars);
template <class Scalar>
class Pack : public ::testing::Test {};
TYPED_TEST_SUITE(Pack, Scalars);
template <class Scalar>
class SubtractProduct : public ::testing::Test {};
TYPED_TEST_SUITE(SubtractProduct, Scalars);
template <class Scalar>
class MultiplyByUpper : public ::testing::Test {};
TYPED_TEST_SUITE(MultiplyByUpper, Scalars);
template <class Scalar>
class StripsAbsMax : public ::testing::Test {};
TYPED_TEST_SUITE(StripsAbsMax, Scalars);
template <class Scalar>
class DivideStrips : public ::testing::Test {};
TYPED_TEST_SUITE(DivideStrips, Scalars);
template <class Scalar>
class StripsGrowthAndImage : public ::testing::Test {};
TYPED_TEST_SUITE(StripsGrowthAndImage, Scalars);

constexpr double kGuard = -777.5;

/// Column-major, rows x columns, stored with some rows more.
template <class Scalar>
struct Plain {
  Index rows, columns, leading;
  std::vector<Scalar> value;

  Plain(Random& random, Index rows_in, Index columns_in, Index more = 0)
      : rows(rows_in), columns(columns_in), leading(rows_in + more) {
    value.resize(static_cast<std::size_t>(leading) * static_cast<std::size_t>(columns));
    for (Scalar& v : value)
      v = static_cast<Scalar>(test::uniform(random, -1, 1) * std::exp2(test::uniform(random, -9, 9)));
  }
  std::size_t place(Index i, Index k) const { return static_cast<std::size_t>(Offset{k} * leading + i); }
  Scalar at(Index i, Index k) const { return value[place(i, k)]; }
};

/// A packed operand with guards around what it may hold.
template <class Scalar>
struct Strips {
  Index strip, stride;
  std::vector<Scalar> value;

  /// Whole strips and whole registers of rows.
  Strips(const KernelSet<Scalar>& set, Index strip_in, Index rows, Index columns)
      : strip(strip_in), stride(strip_in * ((columns + strip_in - 1) / strip_in * strip_in)) {
    const Index whole = std::max(strip, set.lanes);
    value.assign(static_cast<std::size_t>((rows + whole - 1) / whole * (whole / strip) * stride) + 1, kGuard);
  }
  Scalar at(Index i, Index k) const {
    return value[static_cast<std::size_t>(Offset{i / strip} * stride + Offset{k} * strip + i % strip)];
  }
  Index rows() const { return static_cast<Index>(value.size()) / stride * strip; }
};

template <class Scalar>
Strips<Scalar> left_of(const KernelSet<Scalar>& set, const Plain<Scalar>& a) {
  Strips<Scalar> packed(set, set.row_strip, a.rows, a.columns);
  set.pack_left(a.value.data(), a.leading, a.rows, a.columns, packed.value.data(), packed.stride);
  return packed;
}

template <class Scalar>
Strips<Scalar> right_of(const KernelSet<Scalar>& set, const Plain<Scalar>& a) {
  Strips<Scalar> packed(set, set.column_strip, a.rows, a.columns);
  set.pack_right(a.value.data(), a.leading, a.rows, a.columns, packed.value.data(), packed.stride);
  return packed;
}

/// Runs check(set, rows, columns) over sets, all row counts to 70 and some more.
template <class Scalar, class Check>
void sweep(const Check& check) {
  const KernelSet<Scalar>* sets[3];
  const int count = kernel_sets(sets);
  for (int s = 0; s < count; ++s) {
    for (Index rows = 1; rows <= 70; ++rows) {
      SCOPED_TRACE(std::string(sets[s]->isa) + ", rows " + std::to_string(rows));
      check(*sets[s], rows, 1 + rows % 13);
    }
    check(*sets[s], 200, kTileWidth);
  }
}

TYPED_TEST(PackedStrips, FitTogether) {
  using Scalar = TypeParam;
  const KernelSet<Scalar>* sets[3];
  const int count = kernel_sets(sets);
  for (int s = 0; s < count; ++s) {
    EXPECT_EQ(most_row_strip<Scalar>() % sets[s]->row_strip, 0) << sets[s]->isa;
    EXPECT_EQ(sets[s]->row_strip % sets[s]->column_strip, 0) << sets[s]->isa;
    EXPECT_EQ(sets[s]->lanes % sets[s]->column_strip, 0) << sets[s]->isa;
    EXPECT_EQ(sets[s]->row_strip % sets[s]->lanes, 0) << sets[s]->isa;
    EXPECT_EQ(kTileWidth % sets[s]->column_strip, 0) << sets[s]->isa;
  }
}

TYPED_TEST(Pack, PutsEveryEntryInItsStripAndZerosWhereRowsEnd) {
  using Scalar = TypeParam;
  Random random(201);
  sweep<Scalar>([&](const KernelSet<Scalar>& set, Index rows, Index columns) {
    const Plain<Scalar> a(random, rows, columns, rows % 3);
    for (const Strips<Scalar>& packed : {left_of(set, a), right_of(set, a)}) {
      for (Index k = 0; k < columns; ++k) {
        for (Index i = 0; i < packed.rows(); ++i) ASSERT_EQ(packed.at(i, k), i < rows ? a.at(i, k) : 0);
      }
      ASSERT_EQ(packed.value.back(), kGuard);
    }
  });
}

TYPED_TEST(SubtractProduct, EqualsExtendedPrecisionBelowTheDiagonalAndTouchesNothingOutside) {
  using Scalar = TypeParam;
  Random random(202);
  for (const Index columns : {1, 3, 8, 17, 40}) {
    sweep<Scalar>([&](const KernelSet<Scalar>& set, Index rows, Index depth) {
      for (const Index first_row : {-3, 0, 5, 100}) {
        const Index first_column = first_row == 5 ? std::min(columns, rows % 20) : 0;
        const Plain<Scalar> a(random, rows, depth), b(random, columns, depth);
        const Strips<Scalar> left = left_of(set, a), right = right_of(set, b);
        const Index leading = rows + 2;
        std::vector<Scalar> c(static_cast<std::size_t>(leading * columns + 1), kGuard);
        set.subtract_product(left.value.data(), left.stride, right.value.data(), right.stride, depth, rows,
                             columns, first_row, first_column, c.data(), leading);
        for (Index j = 0; j < columns; ++j) {
          for (Index i = 0; i < leading; ++i) {
            const double found = c[static_cast<std::size_t>(j * leading + i)];
            if (i >= rows || j < first_column) {
              ASSERT_EQ(found, kGuard);
            } else if (first_row + i >= j) {
              long double exact = kGuard, size = std::fabs(kGuard);
              for (Index p = 0; p < depth; ++p) {
                const long double product = static_cast<long double>(a.at(i, p)) * b.at(j, p);
                exact -= product;
                size += std::fabs(product);
              }
              ASSERT_NEAR(found, static_cast<double>(exact),
                          90 * Rounding<Scalar>::kUnit * static_cast<double>(size));
            }
          }
        }
        ASSERT_EQ(c.back(), kGuard);
      }
    });
  }
}

/// C = 1 / u (its neighbours are 2 apart) minus sums of products -3/4: a product added alone is lost in
/// rounding, a sum formed apart is not. The error bound counts one addition a call.
TYPED_TEST(SubtractProduct, FormsEverySumApart) {
  using Scalar = TypeParam;
  constexpr auto kLarge = static_cast<Scalar>(1 / Rounding<Scalar>::kUnit);
  const KernelSet<Scalar>* sets[3];
  const int count = kernel_sets(sets);
  for (int s = 0; s < count; ++s) {
    for (const Index depth : {8, 64, 192}) {
      for (const Index rows : {1, 5, 24, 51}) {
        Random random(1);
        Plain<Scalar> a(random, rows, depth), b(random, 9, depth);
        std::fill(a.value.begin(), a.value.end(), 0.75);
        std::fill(b.value.begin(), b.value.end(), -1.0);
        const Strips<Scalar> left = left_of(*sets[s], a), right = right_of(*sets[s], b);
        std::vector<Scalar> c(static_cast<std::size_t>(rows) * 9, kLarge);
        sets[s]->subtract_product(left.value.data(), left.stride, right.value.data(), right.stride, depth,
                                  rows, 9, 100, 0, c.data(), rows);
        for (const Scalar entry : c) ASSERT_EQ(entry, kLarge + 0.75 * depth) << sets[s]->isa;
      }
    }
  }
}

TYPED_TEST(MultiplyByUpper, EqualsExtendedPrecisionWithZerosWhereRowsEnd) {
  using Scalar = TypeParam;
  Random random(203);
  sweep<Scalar>([&](const KernelSet<Scalar>& set, Index rows, Index width) {
    const Plain<Scalar> a(random, rows, width, rows % 4);
    Plain<Scalar> transposed(random, width, width, kTileWidth - width);
    for (Index p = 0; p < width; ++p) {
      for (Index j = 0; j < p; ++j) transposed.value[transposed.place(j, p)] = 0;
    }
    std::vector<Scalar> factor(std::size_t{kTileWidth} * kTileWidth);
    set.pack_right(transposed.value.data(), transposed.leading, width, width, factor.data(),
                   kTileWidth * set.column_strip);
    Strips<Scalar> w(set, set.column_strip, rows, width);
    set.multiply_by_upper(a.value.data(), a.leading, rows, factor.data(), width, w.value.data(), w.stride);
    for (Index j = 0; j < width; ++j) {
      for (Index i = 0; i < w.rows(); ++i) {
        long double exact = 0, size = 0;
        for (Index p = 0; i < rows && p <= j; ++p) {
          const long double product = static_cast<long double>(a.at(i, p)) * transposed.at(j, p);
          exact += product;
          size += std::fabs(product);
        }
        ASSERT_NEAR(w.at(i, j), static_cast<double>(exact),
                    90 * Rounding<Scalar>::kUnit * static_cast<double>(size));
      }
    }
    ASSERT_EQ(w.value.back(), kGuard);
  });
}

TYPED_TEST(StripsAbsMax, EqualsThePlainLoop) {
  using Scalar = TypeParam;
  Random random(121);
  sweep<Scalar>([&](const KernelSet<Scalar>& set, Index rows, Index columns) {
    const Plain<Scalar> w(random, rows, columns);
    const Strips<Scalar> packed = right_of(set, w);
    std::vector<Scalar> out(static_cast<std::size_t>(columns) + 1, kGuard);
    set.strips_abs_max(packed.value.data(), packed.stride, rows, columns, out.data());
    for (Index k = 0; k < columns; ++k) {
      double largest = 0;
      for (Index i = 0; i < rows; ++i) largest = std::max<double>(largest, std::fabs(w.at(i, k)));
      ASSERT_EQ(out[static_cast<std::size_t>(k)], largest);
    }
    ASSERT_EQ(out.back(), kGuard);
  });
}

TYPED_TEST(StripsAbsMax, NanAndInfinityAnywhereMakeTheirColumnInfinite) {
  using Scalar = TypeParam;
  constexpr Scalar kInfinity = std::numeric_limits<Scalar>::infinity();
  Random random(122);
  sweep<Scalar>([&](const KernelSet<Scalar>& set, Index rows, Index columns) {
    for (const Scalar bad : {kInfinity, -kInfinity, std::numeric_limits<Scalar>::quiet_NaN()}) {
      for (const Index row : {Index{0}, rows / 2, rows - 1}) {
        Plain<Scalar> w(random, rows, columns);
        w.value[w.place(row, columns - 1)] = bad;
        const Strips<Scalar> packed = right_of(set, w);
        std::vector<Scalar> out(static_cast<std::size_t>(columns));
        set.strips_abs_max(packed.value.data(), packed.stride, rows, columns, out.data());
        for (Index k = 0; k < columns; ++k)
          ASSERT_EQ(out[static_cast<std::size_t>(k)] == kInfinity, k == columns - 1);
      }
    }
  });
}

/// Pivots of every kind in turn: 1x1, a pair, zero.
template <class Scalar>
struct MixedPivots {
  std::vector<double> diagonal, off_diagonal;
  std::vector<PivotKind> kind;

  MixedPivots(Random& random, Index columns)
      : diagonal(static_cast<std::size_t>(columns)),
        off_diagonal(diagonal.size()),
        kind(diagonal.size(), PivotKind::kOne) {
    for (std::size_t k = 0; k < diagonal.size(); ++k) {
      diagonal[k] = static_cast<Scalar>(test::uniform(random, 0.1, 0.6)) * (random() % 2 ? 1 : -1);
      if (k % 4 == 1 && k + 1 < diagonal.size()) {
        kind[k] = PivotKind::kTwoFirst;
        kind[k + 1] = PivotKind::kTwoSecond;
        off_diagonal[k] = random() % 2 ? 1 : -1.5;
        diagonal[k + 1] = static_cast<Scalar>(test::uniform(random, -0.6, 0.6));
        ++k;
      } else if (k % 4 == 3) {
        kind[k] = PivotKind::kZero;
        diagonal[k] = 0;
      }
    }
  }
};

TYPED_TEST(DivideStrips, SolvesEveryRowAndSumsTheColumns) {
  using Scalar = TypeParam;
  Random random(123);
  sweep<Scalar>([&](const KernelSet<Scalar>& set, Index rows, Index columns) {
    MixedPivots<Scalar> d(random, columns);
    const Plain<Scalar> w(random, rows, columns);
    const Strips<Scalar> packed = right_of(set, w);
    Plain<Scalar> l(random, rows, columns, 2);
    std::fill(l.value.begin(), l.value.end(), kGuard);
    Strips<Scalar> left(set, set.row_strip, rows, columns), left_only = left;
    std::vector<Scalar> sum(static_cast<std::size_t>(columns), 10.0), signed_sum(sum.size(), -3.0), sign,
        ignored = sum;
    for (Index i = 0; i < rows; ++i) sign.push_back(random() % 2 ? 1 : -1);
    const PivotArrays pivots{d.diagonal.data(), d.off_diagonal.data(), d.kind.data()};
    set.divide_strips(packed.value.data(), packed.stride, rows, columns, pivots, sign.data(),
                      left.value.data(), left.stride, l.value.data(), l.leading, sum.data(),
                      signed_sum.data());
    set.divide_strips(packed.value.data(), packed.stride, rows, columns, pivots, sign.data(),
                      left_only.value.data(), left_only.stride, nullptr, 0, ignored.data(), ignored.data());
    ASSERT_EQ(left.value, left_only.value);
    for (Index k = 0; k < columns; ++k) {
      const auto kk = static_cast<std::size_t>(k);
      double expected_sum = 10, expected_signed_sum = -3;
      for (Index i = 0; i < left.rows(); ++i) ASSERT_EQ(left.at(i, k), i < rows ? l.at(i, k) : 0);
      for (Index i = 0; i < rows; ++i) {
        const double value = l.at(i, k);
        expected_sum += std::fabs(value);
        expected_signed_sum += value * sign[static_cast<std::size_t>(i)];
        if (d.kind[kk] == PivotKind::kZero) {
          ASSERT_EQ(value, 0);
        } else if (d.kind[kk] == PivotKind::kOne) {
          const double exact = w.at(i, k) / d.diagonal[kk];
          ASSERT_NEAR(value, exact, 4 * Rounding<Scalar>::kUnit * std::fabs(exact));
        } else if (d.kind[kk] == PivotKind::kTwoFirst) {
          const double next = l.at(i, k + 1), b = d.off_diagonal[kk];
          const double size =
              32 * Rounding<Scalar>::kUnit * std::fabs(b) * (std::fabs(value) + std::fabs(next));
          ASSERT_NEAR(d.diagonal[kk] * value + b * next, w.at(i, k), size);
          ASSERT_NEAR(b * value + d.diagonal[kk + 1] * next, w.at(i, k + 1), size);
        }
      }
      ASSERT_NEAR(sum[kk], expected_sum, 900 * Rounding<Scalar>::kUnit * expected_sum);
      ASSERT_NEAR(signed_sum[kk], expected_signed_sum, 900 * Rounding<Scalar>::kUnit * expected_sum);
      for (Index i = rows; i < l.leading; ++i) ASSERT_EQ(l.at(i, k), kGuard);
    }
    ASSERT_EQ(left.value.back(), kGuard);
  });
}

TYPED_TEST(StripsGrowthAndImage, EqualsThePlainLoopToRounding) {
  using Scalar = TypeParam;
  Random random(128);
  sweep<Scalar>([&](const KernelSet<Scalar>& set, Index rows, Index columns) {
    const Plain<Scalar> a(random, rows, columns), weights(random, 1, columns), steps(random, 1, columns);
    const Strips<Scalar> left = left_of(set, a);
    std::vector<Scalar> growth(static_cast<std::size_t>(rows) + 1, kGuard), image(growth);
    set.strips_growth_and_image(left.value.data(), left.stride, rows, columns, weights.value.data(),
                                steps.value.data(), growth.data(), image.data());
    for (Index i = 0; i < rows; ++i) {
      double expected_growth = kGuard, expected_image = kGuard, size = std::fabs(kGuard);
      for (Index k = 0; k < columns; ++k) {
        const double value = a.at(i, k);
        expected_growth += std::fabs(value) * weights.at(0, k);
        expected_image += value * steps.at(0, k);
        size += std::fabs(value) * (std::fabs(weights.at(0, k)) + std::fabs(steps.at(0, k)));
      }
      ASSERT_NEAR(growth[static_cast<std::size_t>(i)], expected_growth, 900 * Rounding<Scalar>::kUnit * size);
      ASSERT_NEAR(image[static_cast<std::size_t>(i)], expected_image, 900 * Rounding<Scalar>::kUnit * size);
    }
    ASSERT_EQ(growth.back(), kGuard);
    ASSERT_EQ(image.back(), kGuard);
  });
}

}  // namespace
}  // namespace stanchion
