// Material and section constants; SI units throughout (N, m, kg).
#pragma once

#include <array>

namespace stanchion::specimen {

struct Point {
  double x = 0, y = 0, z = 0;
};

inline Point operator-(const Point& a, const Point& b) {
  return {a.x - b.x, a.y - b.y, a.z - b.z};
}
inline double dot(const Point& a, const Point& b) {
  return a.x * b.x + a.y * b.y + a.z * b.z;
}
inline Point cross(const Point& a, const Point& b) {
  return {a.y * b.z - a.z * b.y, a.z * b.x - a.x * b.z, a.x * b.y - a.y * b.x};
}

/// Isotropic and linear.
struct Material {
  double youngs_modulus = 210e9;  ///< N/m^2
  double poisson = 0.3;
  double density = 7850;  ///< kg/m^3
};

/// A doubly symmetric section about its local y and z axes.
struct Section {
  double area = 0;       ///< m^2
  double inertia_y = 0;  ///< m^4, for bending in the local x-z plane
  double inertia_z = 0;  ///< m^4, for bending in the local x-y plane
  double torsion = 0;    ///< m^4, Saint-Venant constant
};

inline constexpr Material kSteel{210e9, 0.3, 7850};
inline constexpr Material kConcrete{32e9, 0.2, 2450};

}  // namespace stanchion::specimen
