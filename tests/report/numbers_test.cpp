#include "report/numbers.hpp"

#include <gtest/gtest.h>

#include <cstdlib>

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

TEST(Numbers, CountedNounsAgree) {
  EXPECT_EQ(counted(0, "zero direction"), "no zero direction");
  EXPECT_EQ(counted(1, "zero direction"), "1 zero direction");
  EXPECT_EQ(counted(1006, "zero direction"), "1,006 zero directions");
}

}  // namespace
}  // namespace stanchion
