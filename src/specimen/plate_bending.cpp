#include "specimen/plate_bending.hpp"

#include "specimen/bilinear.hpp"

namespace stanchion::specimen {
namespace {

/// One shape function at a point: its value and its derivatives by x and y.
struct Jet {
  double value = 0, x = 0, y = 0, xx = 0, yy = 0, xy = 0;
};
using BendingShape = std::array<Jet, 12>;

/// Derivatives by the corner's own coordinates u = +-x/a, v = +-y/b (a, b half sides) turned into those by x,
/// y.
Jet scaled(const Jet& own, double u_by_x, double v_by_y) {
  return {own.value,
          own.x * u_by_x,
          own.y * v_by_y,
          own.xx * u_by_x * u_by_x,
          own.yy * v_by_y * v_by_y,
          own.xy * u_by_x * v_by_y};
}

/// w = 1 at the corner: (1 + u)(1 + v)(2 + u + v - u^2 - v^2) / 8.
Jet deflection_function(double u, double v) {
  const double s = 2 + u + v - u * u - v * v;
  return {(1 + u) * (1 + v) * s / 8,
          (1 + v) * (3 + v - v * v - 3 * u * u) / 8,
          (1 + u) * (3 + u - u * u - 3 * v * v) / 8,
          -0.75 * u * (1 + v),
          -0.75 * v * (1 + u),
          (4 - 3 * u * u - 3 * v * v) / 8};
}

/// dw/dv = 1 at the corner: (1 + u)(1 + v)^2 (v - 1) / 8.
Jet slope_function(double u, double v) {
  const double q = (1 + v) * (v * v - 1), q1 = 3 * v * v + 2 * v - 1, q2 = 6 * v + 2;
  return {(1 + u) * q / 8, q / 8, (1 + u) * q1 / 8, 0, (1 + u) * q2 / 8, q1 / 8};
}

Jet swapped(const Jet& j) {
  return {j.value, j.y, j.x, j.yy, j.xx, j.xy};
}

Jet times(const Jet& j, double c) {
  return {c * j.value, c * j.x, c * j.y, c * j.xx, c * j.yy, c * j.xy};
}

BendingShape shape_at(double a, double b, double s, double t) {
  BendingShape shape;
  for (std::size_t corner = 0; corner < 4; ++corner) {
    const double p = kCorner[corner][0], q = kCorner[corner][1];
    const double u = p * s, v = q * t;
    shape[3 * corner] = scaled(deflection_function(u, v), p / a, q / b);
    shape[3 * corner + 1] = times(scaled(slope_function(u, v), p / a, q / b), q * b);
    shape[3 * corner + 2] = times(scaled(swapped(slope_function(v, u)), p / a, q / b), -p * a);
  }
  return shape;
}

/// Calls `visit(shape, area)` at 4 x 4 Gauss points: exact for every product of two shape functions.
template <class Visit>
void at_gauss_points(const Rectangle& rectangle, const Visit& visit) {
  const double a = rectangle.length / 2, b = rectangle.width / 2;
  for (const auto& p : kGauss4) {
    for (const auto& q : kGauss4) visit(shape_at(a, b, p.position, q.position), a * b * p.weight * q.weight);
  }
}

}  // namespace

ElementMatrix<12> bending_stiffness(const Rectangle& shape, const Material& material) {
  const double nu = material.poisson, t = shape.thickness;
  const double c = material.youngs_modulus * t * t * t / (12 * (1 - nu * nu));
  const Table<3, 3> d{{{c, c * nu, 0}, {c * nu, c, 0}, {0, 0, c * (1 - nu) / 2}}};
  ElementMatrix<12> k;
  at_gauss_points(shape, [&](const BendingShape& functions, double area) {
    Table<3, 12> curvature{};
    for (std::size_t i = 0; i < 12; ++i) {
      curvature[0][i] = functions[i].xx;
      curvature[1][i] = functions[i].yy;
      curvature[2][i] = 2 * functions[i].xy;
    }
    add_gram<3, 12>(k, curvature, d, area);
  });
  return k;
}

ElementMatrix<12> bending_geometric(const Rectangle& shape, const MembraneForce& force) {
  const Table<2, 2> n{{{force.x, force.xy}, {force.xy, force.y}}};
  ElementMatrix<12> g;
  at_gauss_points(shape, [&](const BendingShape& functions, double area) {
    Table<2, 12> slope{};
    for (std::size_t i = 0; i < 12; ++i) {
      slope[0][i] = functions[i].x;
      slope[1][i] = functions[i].y;
    }
    add_gram<2, 12>(g, slope, n, area);
  });
  return g;
}

ElementMatrix<12> bending_mass(const Rectangle& shape, const Material& material) {
  const Table<1, 1> one{{{1}}};
  ElementMatrix<12> m;
  at_gauss_points(shape, [&](const BendingShape& functions, double area) {
    Table<1, 12> value{};
    for (std::size_t i = 0; i < 12; ++i) value[0][i] = functions[i].value;
    add_gram<1, 12>(m, value, one, material.density * shape.thickness * area);
  });
  return m;
}

}  // namespace stanchion::specimen
