// Bilinear functions of a rectangle with its corners in the order of Rectangle.
#pragma once

#include <array>

#include "specimen/membrane.hpp"

namespace stanchion::specimen {

/// Natural coordinates of the corners.
inline constexpr Table<4, 2> kCorner{{{-1, -1}, {1, -1}, {1, 1}, {-1, 1}}};

/// Calls `visit(n, x, y, area)` at the 2 x 2 Gauss points with the corners' functions, their slopes along x
/// and y, and the area that the point stands for.
template <class Visit>
void at_bilinear_points(const Rectangle& shape, const Visit& visit) {
  for (const auto& p : kGauss2) {
    for (const auto& q : kGauss2) {
      std::array<double, 4> n{}, x{}, y{};
      for (std::size_t a = 0; a < 4; ++a) {
        const double s = 1 + kCorner[a][0] * p.position, t = 1 + kCorner[a][1] * q.position;
        n[a] = s * t / 4;
        x[a] = kCorner[a][0] * t / (2 * shape.length);
        y[a] = kCorner[a][1] * s / (2 * shape.width);
      }
      visit(n, x, y, shape.length * shape.width / 4);
    }
  }
}

}  // namespace stanchion::specimen
