#include "specimen/membrane.hpp"

namespace stanchion::specimen {
namespace {

constexpr Table<4, 2> kCorner{{{-1, -1}, {1, -1}, {1, 1}, {-1, 1}}};

/// Calls `visit(s, t, area)` at the 2 x 2 Gauss points, in natural coordinates.
template <class Visit>
void at_gauss_points(const Rectangle& shape, const Visit& visit) {
  const double area = shape.length * shape.width / 4;
  for (const auto& p : kGauss2) {
    for (const auto& q : kGauss2) visit(p.position, q.position, area);
  }
}

}  // namespace

ElementMatrix<8> membrane_stiffness(const Rectangle& shape, const Material& material) {
  const double nu = material.poisson;
  const double c = material.youngs_modulus * shape.thickness / (1 - nu * nu);
  const Table<3, 3> d{{{c, c * nu, 0}, {c * nu, c, 0}, {0, 0, c * (1 - nu) / 2}}};
  ElementMatrix<8> k;
  at_gauss_points(shape, [&](double s, double t, double area) {
    Table<3, 8> b{};
    for (std::size_t a = 0; a < 4; ++a) {
      const double x = kCorner[a][0] * (1 + kCorner[a][1] * t) / 4 * 2 / shape.length;
      const double y = kCorner[a][1] * (1 + kCorner[a][0] * s) / 4 * 2 / shape.width;
      b[0][2 * a] = b[2][2 * a + 1] = x;
      b[1][2 * a + 1] = b[2][2 * a] = y;
    }
    add_gram<3, 8>(k, b, d, area);
  });
  return k;
}

ElementMatrix<8> membrane_mass(const Rectangle& shape, const Material& material) {
  const Table<2, 2> d{{{1, 0}, {0, 1}}};
  ElementMatrix<8> m;
  at_gauss_points(shape, [&](double s, double t, double area) {
    Table<2, 8> b{};
    for (std::size_t a = 0; a < 4; ++a) {
      b[0][2 * a] = b[1][2 * a + 1] = (1 + kCorner[a][0] * s) * (1 + kCorner[a][1] * t) / 4;
    }
    add_gram<2, 8>(m, b, d, material.density * shape.thickness * area);
  });
  return m;
}

}  // namespace stanchion::specimen
