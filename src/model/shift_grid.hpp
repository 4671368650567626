// The shifts of a sweep, as a person would type them: 1.675, not the 1.6749999999999998 that arithmetic
// gives.
#pragma once

#include <vector>

#include "stanchion/request.hpp"

namespace stanchion {

/// The number of fewest decimal digits within `tolerance` of `value`; `value` itself where that takes more
/// than twelve.
double shortest_within(double value, double tolerance);

/// Strictly between the two, which differ: the number of fewest digits; the middle where that takes more.
double shortest_between(double a, double b);

/// The shifts of the grid, ascending, its ends as given: equal steps or equal ratios to within a few
/// roundings, and within these the number of fewest digits. Never closer than half a step, so that they stay
/// apart.
std::vector<double> shift_grid(const SweepRequest& sweep);

/// Where to divide low < high: a number of few digits in the middle quarter; the middle itself, which may be
/// an end, where there is none.
double middle_shift(double low, double high);

}  // namespace stanchion
