// Source: closed form of the 7-point Laplacian, at sizes that take minutes (ctest -L long).
#include <gtest/gtest.h>

#include "oracle/closed_form.hpp"

namespace stanchion {
namespace {

TEST(ClosedFormLong, LaplacianOfAHundredThousandCountsExactly) {
  EXPECT_EQ(test::expect_closed_form_counts(45, 47, 48, {0.0, 0.2, 0.5}, 1e-6, available_processors()), 3);
}

TEST(ClosedFormLong, LaplacianOfThreeHundredThousandCountsExactly) {
  EXPECT_EQ(test::expect_closed_form_counts(65, 67, 69, {0.3}, 1e-6, available_processors()), 1);
}

TEST(ClosedFormLong, ACubeWithSixfoldClustersCountsExactly) {
  // 60 * 60 * 60 = 216,000; equal sides: values of three different directions come six times.
  EXPECT_EQ(test::expect_closed_form_counts(60, 60, 60, {0.01, 0.3}, 1e-4, available_processors()), 2);
}

TEST(ClosedFormLong, LaplacianOfAMillionInThinPlateCountsExactly) {
  EXPECT_EQ(test::expect_closed_form_counts(499, 501, 4, {0.0, 0.4}, 1e-7, available_processors()), 2);
}

}  // namespace
}  // namespace stanchion
