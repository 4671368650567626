#include "model/numbers.hpp"

#include <gtest/gtest.h>

#include <cmath>
#include <cstdlib>
#include <random>

namespace stanchion {
namespace {

TEST(Numbers, DigitsAreGroupedByThree) {
  EXPECT_EQ(grouped(0), "0");
  EXPECT_EQ(grouped(999), "999");
  EXPECT_EQ(grouped(1000), "1,000");
  EXPECT_EQ(grouped(-123456), "-123,456");
  EXPECT_EQ(grouped(12345678901), "12,345,678,901");
}

TEST(Numbers, ExactReadsBackToTheSameDouble) {
  for (const double number : {0.1, -1.5, 1.0 / 3, 1e300, 5e-324, 2.0}) {
    EXPECT_EQ(std::strtod(exact(number).c_str(), nullptr), number);
  }
  EXPECT_EQ(exact(1.5), "1.5");
}

TEST(Numbers, BoundsStayBoundsWhenTheyAreRounded) {
  EXPECT_EQ(rounded_down(2.940988003064926, 13), "2.940988003064");
  EXPECT_EQ(rounded_up(2.9409880030963724, 13), "2.940988003097");
  EXPECT_EQ(rounded_up(-2.9409880030963724, 13), "-2.940988003096");
  EXPECT_EQ(rounded_up(9.99999, 3), "10");
  EXPECT_EQ(rounded_down(0.5, 3), "0.5");
  EXPECT_EQ(rounded_up(0, 3), "0");
  std::mt19937_64 random(5);
  std::uniform_real_distribution<double> mantissa(-10, 10), power(-300, 300);
  for (int k = 0; k < 20000; ++k) {
    const double number = mantissa(random) * std::pow(10, power(random));
    for (const int digits : {2, 4, 7, 11, 15, 17}) {
      const double low = std::strtod(rounded_down(number, digits).c_str(), nullptr);
      const double high = std::strtod(rounded_up(number, digits).c_str(), nullptr);
      ASSERT_LE(low, number) << digits;
      ASSERT_GE(high, number) << digits;
      // One unit of the last digit; what was read back is itself rounded, by up to 2 % of that at 15 digits.
      ASSERT_LE(high - low, 1.05 * std::fabs(number) * std::pow(10, 1 - std::min(digits, 15)))
          << number << " " << digits;
    }
  }
}

TEST(Numbers, SizesAndFlopsCarryTheLargestPrefix) {
  EXPECT_EQ(bytes_in_words(0), "0 B");
  EXPECT_EQ(bytes_in_words(999), "999 B");
  EXPECT_EQ(bytes_in_words(1300), "1.3 kB");
  EXPECT_EQ(bytes_in_words(118000000), "118 MB");
  EXPECT_EQ(bytes_in_words(999999999), "1.0 GB");
  EXPECT_EQ(flops_in_words(4.6e9), "4.6 Gflop");
  EXPECT_EQ(flops_in_words(2.5e18), "2500 Pflop");
}

TEST(Numbers, DurationsChangeTheirUnit) {
  EXPECT_EQ(duration_in_words(0), "<1 ms");
  EXPECT_EQ(duration_in_words(0.0312), "0.031 s");
  EXPECT_EQ(duration_in_words(0.999), "1.0 s");
  EXPECT_EQ(duration_in_words(12.34), "12.3 s");
  EXPECT_EQ(duration_in_words(59.99), "1 min 0 s");
  EXPECT_EQ(duration_in_words(75), "1 min 15 s");
  EXPECT_EQ(duration_in_words(7260), "2 h 1 min");
  EXPECT_EQ(duration_in_words(-1), "unknown");
}

TEST(Numbers, DurationsInASentenceAreQualifiedUnlessTooShort) {
  EXPECT_EQ(duration_in_sentence(0.0004, "about "), "less than 1 ms");
  EXPECT_EQ(duration_in_sentence(0.0312, "about "), "about 0.031 s");
  EXPECT_EQ(duration_in_sentence(75), "1 min 15 s");
}

TEST(Numbers, CountedNounsAgree) {
  EXPECT_EQ(counted(0, "zero direction"), "no zero direction");
  EXPECT_EQ(counted(1, "zero direction"), "1 zero direction");
  EXPECT_EQ(counted(1006, "zero direction"), "1,006 zero directions");
}

}  // namespace
}  // namespace stanchion
