#include "model/shift_grid.hpp"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <cstdlib>
#include <limits>

namespace stanchion {
namespace {

std::vector<double> grid(double from, double to, Index points, bool geometric = false) {
  SweepRequest sweep;
  sweep.from = from;
  sweep.to = to;
  sweep.points = points;
  sweep.geometric = geometric;
  return shift_grid(sweep);
}

TEST(ShiftGrid, EqualStepsAreTheNumbersAPersonWouldType) {
  EXPECT_EQ(grid(0.5, 1.0, 5), (std::vector<double>{0.5, 0.625, 0.75, 0.875, 1.0}));
  EXPECT_EQ(grid(-0.3, 0.3, 7), (std::vector<double>{-0.3, -0.2, -0.1, 0, 0.1, 0.2, 0.3}));
  EXPECT_NE(1 + (1.9 - 1) * 0.75, 1.675);  // but 1.6749999999999998
  EXPECT_EQ(grid(1, 1.9, 9)[6], 1.675);
}

/// Every grid of thousandths: strtod of the digits is the point, whatever the interpolation rounds to.
TEST(ShiftGrid, ThousandthsComeOutAsWritten) {
  Index altered = 0;
  for (const Index step : {1, 3, 7, 25, 250}) {
    for (const Index first : {-2000, -37, 0, 1, 500}) {
      const Index points = 33, last = first + step * (points - 1);
      const auto shifts = grid(first / 1000.0, last / 1000.0, points);
      for (Index k = 0; k < points; ++k) {
        const double from = first / 1000.0, to = last / 1000.0;
        const double typed = std::strtod((std::to_string(first + step * k) + "e-3").c_str(), nullptr);
        EXPECT_EQ(shifts[static_cast<std::size_t>(k)], typed) << first << " " << step << " " << k;
        altered += from + (to - from) * (k / (points - 1.0)) != typed;
      }
    }
  }
  EXPECT_GT(altered, 50);  // else this would show nothing
}

TEST(ShiftGrid, EqualRatiosAreDecadesWhereTheyAreMeant) {
  EXPECT_EQ(grid(1e-3, 1e3, 7, true), (std::vector<double>{1e-3, 1e-2, 1e-1, 1, 10, 100, 1000}));
  EXPECT_EQ(grid(-8, -1, 4, true), (std::vector<double>{-8, -4, -2, -1}));
  const double root = grid(1, 2, 3, true)[1];  // nobody types this: left alone
  EXPECT_NEAR(root, std::sqrt(2.0), 4e-16);
  EXPECT_NE(root, shortest_within(root, 1e-11));
}

TEST(ShiftGrid, PointsStayApartInTheNarrowestRange) {
  double to = 1;
  for (int k = 0; k < 20; ++k) to = std::nextafter(to, 2);
  const auto shifts = grid(1, to, 11);
  for (std::size_t k = 1; k < shifts.size(); ++k) EXPECT_LT(shifts[k - 1], shifts[k]);
  const auto tiny = grid(5e-324, 5e-323, 4);
  EXPECT_TRUE(std::is_sorted(tiny.begin(), tiny.end()));
}

TEST(ShiftGrid, TheShortestNumberWithin) {
  EXPECT_EQ(shortest_within(1.6749999999999998, 1e-15), 1.675);
  EXPECT_EQ(shortest_within(3.14159265358979, 0.002), 3.14);
  EXPECT_EQ(shortest_within(0.9996, 0.001), 1);
  EXPECT_EQ(shortest_within(-2e-17, 1e-16), 0);
  EXPECT_EQ(shortest_within(1.0 / 3, 1e-15), 1.0 / 3);
  EXPECT_EQ(shortest_within(1.5, 0), 1.5);
}

TEST(ShiftGrid, ADividedStretchIsDividedNearItsMiddle) {
  for (const auto& [low, high] : {std::pair{1.6625, 1.675},
                                  {-0.7, 0.1},
                                  {1.0, std::nextafter(1.0, 2)},
                                  {1e-300, 1e-299},
                                  {-7.3e8, -7.1e8},
                                  {1.0, 1 + 0x1p-40}}) {
    const double middle = middle_shift(low, high);
    EXPECT_GE(middle, low + (high - low) * 0.37);
    EXPECT_LE(middle, low + (high - low) * 0.63 + std::numeric_limits<double>::epsilon());
  }
  EXPECT_EQ(middle_shift(1.6625, 1.675), 1.67);
}

}  // namespace
}  // namespace stanchion
