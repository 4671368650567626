// Every operation against 1024-bit arithmetic: its error stays within the bound stated beside it, and comes
// near enough to it that the measurement can be trusted.
#include <gtest/gtest.h>

#include "extended/exact.hpp"
#include "extended/kernels.hpp"
#include "support/generators.hpp"

namespace stanchion {
namespace {

using test::Long;
using test::Random;
using test::to_long;

/// Normalised pair with exponent within +-range; every fourth one close in size and opposite in sign to
/// `near`.
DoubleDouble random_number(Random& random, int range, const DoubleDouble* near = nullptr) {
  const auto part = [&] { return test::uniform(random, 1, 2) * (random() % 2 ? 1 : -1); };
  if (near != nullptr && random() % 4 == 0) {
    return two_sum(-near->hi * (1 + static_cast<double>(random() % 5) * 0x1p-52), near->lo * part());
  }
  const double hi =
      std::ldexp(part(), static_cast<int>(random() % static_cast<unsigned>(2 * range + 1)) - range);
  return two_sum(hi, hi * 0x1p-53 * part() / 2 * (random() % 8 ? 1 : 0x1p-20));
}

bool normalised(DoubleDouble x) {
  return std::fabs(x.lo) <= 0x1p-53 * std::fabs(x.hi);
}

/// Largest error of `computed` over `rounds` random operands, in units of u^2 times `scale_of`.
template <class Computed, class Exact, class Scale>
double worst(const Computed& computed, const Exact& exact, const Scale& scale_of, int rounds = 60'000) {
  Random random(17);
  double most = 0;
  for (int k = 0; k < rounds; ++k) {
    const DoubleDouble x = random_number(random, 40), y = random_number(random, 40, &x);
    const DoubleDouble z = computed(x, y);
    EXPECT_TRUE(normalised(z)) << x.hi << " " << y.hi;
    const Long scale = scale_of(x, y), error = abs(to_long(z) - exact(x, y));
    if (scale == 0) {
      EXPECT_EQ(error, 0);
    } else {
      most = std::max(most, static_cast<double>(error / scale) / kDoubleUnitSquared);
    }
  }
  return most;
}

TEST(DoubleDouble, SumsAndProductsOfDoublesAreExact) {
  Random random(5);
  for (int k = 0; k < 20'000; ++k) {
    const double a = random_number(random, 60).hi, b = random_number(random, 60).hi;
    EXPECT_EQ(to_long(two_sum(a, b)), Long(a) + Long(b));
    EXPECT_EQ(to_long(two_product(a, b)), Long(a) * Long(b));
    if (std::fabs(a) >= std::fabs(b)) {
      EXPECT_EQ(to_long(fast_two_sum(a, b)), Long(a) + Long(b));
    }
  }
}

TEST(DoubleDouble, SumKeepsItsBoundEvenUnderCancellation) {
  const auto exact = [](DoubleDouble x, DoubleDouble y) { return Long(to_long(x) + to_long(y)); };
  const auto scale = [&](DoubleDouble x, DoubleDouble y) { return Long(abs(exact(x, y))); };
  const double most = worst([](DoubleDouble x, DoubleDouble y) { return x + y; }, exact, scale);
  EXPECT_LE(most, 3.01);
  EXPECT_GE(most, 1);
}

TEST(DoubleDouble, ProductsKeepTheirBounds) {
  const auto exact = [](DoubleDouble x, DoubleDouble y) { return Long(to_long(x) * to_long(y)); };
  const auto scale = [&](DoubleDouble x, DoubleDouble y) { return Long(abs(exact(x, y))); };
  const double most = worst([](DoubleDouble x, DoubleDouble y) { return x * y; }, exact, scale);
  EXPECT_LE(most, 5);
  EXPECT_GE(most, 1.5);
  const auto exact_short = [](DoubleDouble x, DoubleDouble y) { return Long(to_long(x) * Long(y.hi)); };
  const auto scale_short = [&](DoubleDouble x, DoubleDouble y) { return Long(abs(exact_short(x, y))); };
  const double most_short =
      worst([](DoubleDouble x, DoubleDouble y) { return x * y.hi; }, exact_short, scale_short);
  EXPECT_LE(most_short, 1.51);
  EXPECT_GE(most_short, 0.7);
}

TEST(DoubleDouble, QuotientKeepsItsBound) {
  const auto exact = [](DoubleDouble x, DoubleDouble y) { return Long(to_long(x) / to_long(y)); };
  const auto scale = [&](DoubleDouble x, DoubleDouble y) { return Long(abs(exact(x, y))); };
  const double most = worst([](DoubleDouble x, DoubleDouble y) { return x / y; }, exact, scale, 20'000);
  EXPECT_LE(most, 15.01);
  EXPECT_GE(most, 2);
}

TEST(DoubleDouble, TakingOffAProductKeepsItsAbsoluteBound) {
  Random random(23);
  double most = 0;
  for (int k = 0; k < 60'000; ++k) {
    const DoubleDouble a = random_number(random, 20), b = random_number(random, 20);
    const DoubleDouble product = -(a * b), c = random_number(random, 40, &product);
    const DoubleDouble z = subtract_product(c, a, b);
    EXPECT_TRUE(normalised(z));
    const Long ab = to_long(a) * to_long(b), exact = to_long(c) - ab;
    const Long bound = 9 * abs(ab) + 2 * abs(to_long(c)) + 2 * abs(exact);
    most = std::max(most, static_cast<double>(abs(to_long(z) - exact) / bound) / kDoubleUnitSquared);
  }
  EXPECT_LE(most, 1.000001);
  EXPECT_GE(most, 0.2);
}

TEST(ExtendedKernels, EveryInstructionSetGivesTheSameBits) {
  constexpr Index kRows = 301, kCount = 7;
  constexpr Offset kPlane = Offset{kRows} * (kCount + 3);
  Random random(3);
  std::vector<double> start(static_cast<std::size_t>(2 * kPlane));
  for (Offset i = 0; i < kPlane; ++i) {
    const DoubleDouble x = random_number(random, 6);
    start[static_cast<std::size_t>(i)] = x.hi;
    start[static_cast<std::size_t>(kPlane + i)] = x.lo;
  }
  std::vector<DoubleDouble> w(kCount);
  for (DoubleDouble& x : w) x = random_number(random, 3);
  const ScalarKernels<DoubleDouble>* sets[3];
  const int count = scalar_kernel_sets(sets);
  std::vector<double> reference, reference_sums;
  for (int set = 0; set < count; ++set) {
    std::vector<double> data = start;
    const Strip<DoubleDouble> strip{data.data(), kPlane};
    const auto column = [&](Offset k) { return strip + k * kRows; };
    double sums[3];
    sets[set]->subtract_products(column(0), column(1), kRows, w.data(), kRows, kCount);
    sums[0] = sets[set]->divide(column(0), column(kCount + 1), kRows, w[0]);
    sets[set]->solve_pair(column(1), column(2), column(3), column(4), kRows,
                          {{0.5, 0x1p-60}, {-1, 0x1p-55}, {0.25, 0}}, sums + 1);
    const std::vector<double> all(sums, sums + 3);
    if (set == 0) {
      reference = data;
      reference_sums = all;
    }
    EXPECT_EQ(data, reference) << sets[set]->isa;
    EXPECT_EQ(all, reference_sums) << sets[set]->isa;
  }
  EXPECT_NE(reference, start);
}

}  // namespace
}  // namespace stanchion
