// The counts of a sweep as points of a staircase, for every picture of it.
#pragma once

#include <algorithm>
#include <vector>

#include "stanchion/outcome.hpp"

namespace stanchion {

/// A count that is known as one number.
struct StaircasePoint {
  double shift = 0;
  Index count = 0;
};

/// The known counts, by ascending shift.
inline std::vector<StaircasePoint> known_points(const std::vector<ShiftCount>& counts) {
  std::vector<StaircasePoint> points;
  for (const ShiftCount& count : counts) {
    if (count.below) points.push_back({count.shift, *count.below});
  }
  std::sort(points.begin(), points.end(),
            [](const StaircasePoint& a, const StaircasePoint& b) { return a.shift < b.shift; });
  return points;
}

}  // namespace stanchion
