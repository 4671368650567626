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

/// 100 * 100 * 100: 171,700 different values, 7e-5 apart in the mean. Deep inside the spectrum the proved
/// bound of so large a factor is of the same size, so that between two neighbouring clusters nothing can be
/// proved; in a wide gap it can, as below the first of them.
TEST(ClosedFormLong, ACubeOfAMillionHasSixInItsFirstSixfoldCluster) {
  auto spectrum = test::laplacian_spectrum(100, 100, 100);
  std::sort(spectrum.begin(), spectrum.end());
  // 1; 3; 3; 3; 1; 6: the waves (1, 2, 3) in every order
  ASSERT_LT(spectrum[16] - spectrum[11], 1e-12);
  const std::vector<double> around{(spectrum[10] + spectrum[11]) / 2, (spectrum[16] + spectrum[17]) / 2};
  test::expect_proved_counts(100, 100, 100, spectrum, around, available_processors());
}

TEST(ClosedFormLong, ACubeOfAMillionCountsExactlyInAWideGapDeepInside) {
  auto spectrum = test::laplacian_spectrum(100, 100, 100);
  std::sort(spectrum.begin(), spectrum.end());
  const std::vector<double> shifts = test::shifts_in_widest_gaps(spectrum, {0.1});
  test::expect_proved_counts(100, 100, 100, spectrum, shifts, available_processors());
}

TEST(ClosedFormLong, LaplacianOfAMillionInThinPlateCountsExactly) {
  EXPECT_EQ(test::expect_closed_form_counts(499, 501, 4, {0.0, 0.4}, 1e-7, available_processors()), 2);
}

}  // namespace
}  // namespace stanchion
