#include "model/shift_grid.hpp"

#include <algorithm>
#include <charconv>
#include <cmath>

namespace stanchion {
namespace {

constexpr int kMostDigits = 12;
/// Roundings of a point of the grid, with room: of the interpolation, or of the power.
constexpr double kFewRoundings = 4 * 0x1p-52;

}  // namespace

double shortest_within(double value, double tolerance) {
  if (std::fabs(value) <= tolerance) return 0;
  char text[64];
  for (int digits = 1; digits <= kMostDigits; ++digits) {
    const auto written =
        std::to_chars(text, text + sizeof text, value, std::chars_format::scientific, digits - 1);
    double rounded = value;
    std::from_chars(text, written.ptr, rounded);
    if (std::fabs(rounded - value) <= tolerance) return rounded;
  }
  return value;
}

double shortest_between(double a, double b) {
  const double half = (b - a) / 2;
  return shortest_within(a + half, std::fabs(half) * (1 - 0x1p-20));
}

std::vector<double> shift_grid(const SweepRequest& sweep) {
  const double steps = sweep.points - 1;
  const double size = std::max(std::fabs(sweep.from), std::fabs(sweep.to));
  std::vector<double> shifts{sweep.from};
  for (Index k = 1; k + 1 < sweep.points; ++k) {
    const double part = k / steps;
    const double shift = sweep.geometric ? sweep.from * std::pow(sweep.to / sweep.from, part)
                                         : sweep.from + (sweep.to - sweep.from) * part;
    const double step = sweep.geometric ? std::fabs(shift * std::log(sweep.to / sweep.from)) / steps
                                        : (sweep.to - sweep.from) / steps;
    const double roundings = kFewRoundings * (sweep.geometric ? std::fabs(shift) : size);
    shifts.push_back(shortest_within(shift, std::min(roundings, step / 4)));
  }
  shifts.push_back(sweep.to);
  return shifts;
}

double middle_shift(double low, double high) {
  const double width = high - low;
  return shortest_within(low + width / 2, width / 8);
}

}  // namespace stanchion
