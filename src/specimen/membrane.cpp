#include "specimen/membrane.hpp"

#include "specimen/bilinear.hpp"

namespace stanchion::specimen {
ElementMatrix<8> membrane_stiffness(const Rectangle& shape, const Material& material) {
  const double nu = material.poisson;
  const double c = material.youngs_modulus * shape.thickness / (1 - nu * nu);
  const Table<3, 3> d{{{c, c * nu, 0}, {c * nu, c, 0}, {0, 0, c * (1 - nu) / 2}}};
  ElementMatrix<8> k;
  at_bilinear_points(shape, [&](const auto&, const auto& x, const auto& y, double area) {
    Table<3, 8> b{};
    for (std::size_t a = 0; a < 4; ++a) {
      b[0][2 * a] = b[2][2 * a + 1] = x[a];
      b[1][2 * a + 1] = b[2][2 * a] = y[a];
    }
    add_gram<3, 8>(k, b, d, area);
  });
  return k;
}

ElementMatrix<8> membrane_mass(const Rectangle& shape, const Material& material) {
  const Table<2, 2> d{{{1, 0}, {0, 1}}};
  ElementMatrix<8> m;
  at_bilinear_points(shape, [&](const auto& n, const auto&, const auto&, double area) {
    Table<2, 8> b{};
    for (std::size_t a = 0; a < 4; ++a) b[0][2 * a] = b[1][2 * a + 1] = n[a];
    add_gram<2, 8>(m, b, d, material.density * shape.thickness * area);
  });
  return m;
}

}  // namespace stanchion::specimen
