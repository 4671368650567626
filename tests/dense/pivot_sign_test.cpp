// The inertia of a 2x2 pivot against exact integer arithmetic.
#include "dense/pivot_sign.hpp"

#include <gtest/gtest.h>

#include <array>
#include <cfloat>
#include <cmath>

#include "support/generators.hpp"

namespace stanchion {
namespace {

__extension__ typedef __int128 Wide;
using Counts = std::array<int, 3>;

Counts counts(double a, double b, double c) {
  const SignCount sign = sign_of_two_by_two(a, b, c);
  return {sign.negative, sign.zero, sign.positive};
}

/// A double as integer times a power of two.
struct Dyadic {
  Wide mantissa;
  int exponent;
};

Dyadic exactly(double x) {
  int exponent = 0;
  const double mantissa = std::frexp(x, &exponent);
  return {static_cast<Wide>(std::ldexp(mantissa, 53)), exponent - 53};
}

/// Sign of a c - b^2 in 128-bit integers; far apart exponents decide alone.
int exact_determinant_sign(double a, double b, double c) {
  const Dyadic da = exactly(a), db = exactly(b), dc = exactly(c);
  Wide product = da.mantissa * dc.mantissa, square = db.mantissa * db.mantissa;
  if (product == 0 || square == 0 || product < 0) return product > square ? 1 : (product < square ? -1 : 0);
  const int gap = da.exponent + dc.exponent - 2 * db.exponent;
  if (gap > 10) return 1;
  if (gap < -10) return -1;
  (gap > 0 ? product : square) <<= std::abs(gap);
  return product > square ? 1 : (product < square ? -1 : 0);
}

Counts exact_counts(double a, double b, double c) {
  const int determinant = exact_determinant_sign(a, b, c);
  if (determinant < 0) return {1, 0, 1};
  const int trace = a + c > 0 || a > 0 || c > 0 ? 1 : (a < 0 || c < 0 ? -1 : 0);
  if (determinant > 0) return trace > 0 ? Counts{0, 0, 2} : Counts{2, 0, 0};
  return trace > 0 ? Counts{0, 1, 1} : (trace < 0 ? Counts{1, 1, 0} : Counts{0, 2, 0});
}

/// The block itself, its negative, its mirror image, and all of them at extreme scales.
void expect_exact_everywhere(double a, double b, double c) {
  for (const double sign : {1.0, -1.0}) {
    for (const int balance : {0, 1, 37, -512, 1000}) {
      for (const int scale : {0, 900, -900}) {
        const double x = sign * std::ldexp(a, scale + balance), y = sign * std::ldexp(c, scale - balance);
        const double off = std::ldexp(b, scale);
        const bool representable = std::isnormal(x) && std::isnormal(y) && std::isnormal(off);
        if (!representable) continue;
        const Counts expected = exact_counts(x, off, y);
        ASSERT_EQ(counts(x, off, y), expected) << std::hexfloat << x << " " << off << " " << y;
        ASSERT_EQ(counts(y, off, x), expected);
        ASSERT_EQ(counts(x, -off, y), expected);
      }
    }
  }
}

TEST(PivotSign, OfOneEntry) {
  EXPECT_EQ(sign_of_pivot(-DBL_TRUE_MIN).negative, 1);
  EXPECT_EQ(sign_of_pivot(DBL_TRUE_MIN).positive, 1);
  EXPECT_EQ(sign_of_pivot(0.0).zero, 1);
  EXPECT_EQ(sign_of_pivot(-0.0).zero, 1);
}

TEST(PivotSign, TwoByTwoByHand) {
  EXPECT_EQ(counts(0, 1, 0), (Counts{1, 0, 1}));
  EXPECT_EQ(counts(2, 1, 2), (Counts{0, 0, 2}));
  EXPECT_EQ(counts(-2, 1, -2), (Counts{2, 0, 0}));
  EXPECT_EQ(counts(1, 2, 1), (Counts{1, 0, 1}));
  EXPECT_EQ(counts(1, 2, 4), (Counts{0, 1, 1}));
  EXPECT_EQ(counts(-1, 2, -4), (Counts{1, 1, 0}));
  EXPECT_EQ(counts(1, 0, -1), (Counts{1, 0, 1}));
  EXPECT_EQ(counts(0, 0, 0), (Counts{0, 2, 0}));
  EXPECT_EQ(counts(0, 0, -3), (Counts{1, 1, 0}));
  EXPECT_EQ(counts(0, DBL_TRUE_MIN, DBL_MAX), (Counts{1, 0, 1}));
  EXPECT_EQ(counts(DBL_MAX, DBL_MAX, DBL_MAX), (Counts{0, 1, 1}));
  EXPECT_EQ(counts(DBL_MAX, std::nextafter(DBL_MAX, 0), DBL_MAX), (Counts{0, 0, 2}));
}

TEST(PivotSign, RandomBlocks) {
  test::Random random(91);
  for (int round = 0; round < 20'000; ++round) {
    expect_exact_everywhere(test::uniform(random, -1, 1), test::uniform(random, -1, 1),
                            test::uniform(random, -1, 1));
  }
}

TEST(PivotSign, DeterminantsOneUnitFromZero) {
  test::Random random(92);
  int singular = 0, negative = 0, positive = 0;
  for (int round = 0; round < 40'000; ++round) {
    // p^2 q^2 = (p q)^2 exactly when p, q have 26 bits; else c is the nearest double to b^2 / a.
    const bool integers = round % 2 == 0;
    const double bits = integers ? 0x1p26 : 0x1p53;
    const double p = std::floor(test::uniform(random, bits / 2, bits)),
                 q = std::floor(test::uniform(random, bits / 2, bits));
    double a = integers ? p * p : p, b = integers ? p * q : q, c = integers ? q * q : q / p * q;
    for (int steps = static_cast<int>(random() % 3); steps > 0; --steps) {
      double& moved = round % 3 == 0 ? a : (round % 3 == 1 ? b : c);
      moved = std::nextafter(moved, random() % 2 ? 0.0 : DBL_MAX);
    }
    const int sign = exact_determinant_sign(a, b, c);
    (sign == 0 ? singular : (sign < 0 ? negative : positive)) += 1;
    expect_exact_everywhere(a, b, c);
  }
  EXPECT_GT(singular, 1000);
  EXPECT_GT(negative, 1000);
  EXPECT_GT(positive, 1000);
}

TEST(PivotSign, DenormalAndHugeEntries) {
  test::Random random(93);
  for (int round = 0; round < 20'000; ++round) {
    const auto entry = [&] {
      const double mantissa = test::uniform(random, 0.5, 1) * (random() % 2 ? 1 : -1);
      return std::ldexp(mantissa, static_cast<int>(random() % 2096) - 1072);
    };
    const double a = entry(), c = entry(),
                 b = random() % 2 ? entry() : std::sqrt(std::fabs(a)) * std::sqrt(std::fabs(c));
    ASSERT_EQ(counts(a, b, c), exact_counts(a, b, c)) << std::hexfloat << a << " " << b << " " << c;
  }
}

TEST(PivotSign, RunsAreSummedPivotByPivot) {
  double diagonal[] = {-1, 2, 2, 0, 1, 4, -5}, off_diagonal[] = {9, 3, 0, 0, 2, 0, 0};
  PivotKind kind[] = {PivotKind::kOne,      PivotKind::kTwoFirst,  PivotKind::kTwoSecond, PivotKind::kZero,
                      PivotKind::kTwoFirst, PivotKind::kTwoSecond, PivotKind::kOne};
  const SignCount total = sign_of_pivots({diagonal, off_diagonal, kind}, 7);
  EXPECT_EQ(total.negative, 3);
  EXPECT_EQ(total.zero, 2);
  EXPECT_EQ(total.positive, 2);
}

}  // namespace
}  // namespace stanchion
