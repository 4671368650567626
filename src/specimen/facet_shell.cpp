#include "specimen/facet_shell.hpp"

#include <cmath>

#include "specimen/bilinear.hpp"
#include "specimen/flat_shell.hpp"

namespace stanchion::specimen {
namespace {

/// The five unknowns of the flat shell among the six.
ElementMatrix<24> widened(const ElementMatrix<20>& shell) {
  ElementMatrix<24> wide;
  for (int a = 0; a < 4; ++a) {
    for (int b = 0; b < 4; ++b) {
      for (int i = 0; i < 5; ++i) {
        for (int j = 0; j < 5; ++j) wide(6 * a + i, 6 * b + j) = shell(5 * a + i, 5 * b + j);
      }
    }
  }
  return wide;
}

}  // namespace

ElementMatrix<24> facet_stiffness(const Rectangle& shape, const Material& material) {
  ElementMatrix<24> k = widened(shell_stiffness(shape, material));
  const double shear = material.youngs_modulus * shape.thickness / (2 * (1 + material.poisson));
  at_bilinear_points(shape, [&](const auto& n, const auto& x, const auto& y, double area) {
    Table<1, 24> b{};  // rz - (d uy/dx - d ux/dy) / 2
    for (std::size_t a = 0; a < 4; ++a) {
      b[0][6 * a] = y[a] / 2;
      b[0][6 * a + 1] = -x[a] / 2;
      b[0][6 * a + 5] = n[a];
    }
    add_gram<1, 24>(k, b, Table<1, 1>{{{shear}}}, area);
  });
  return k;
}

ElementMatrix<24> facet_geometric(const Rectangle& shape, double force_x) {
  ElementMatrix<24> g = widened(shell_geometric(shape, {force_x, 0, 0}));
  at_bilinear_points(shape, [&](const auto&, const auto& x, const auto&, double area) {
    Table<1, 24> b{};
    for (std::size_t a = 0; a < 4; ++a) b[0][6 * a + 1] = x[a];
    add_gram<1, 24>(g, b, Table<1, 1>{{{force_x}}}, area);
  });
  return g;
}

ElementMatrix<24> facet_mass(const Rectangle& shape, const Material& material) {
  return widened(shell_mass(shape, material));
}

ElementMatrix<24> facet_lumped_mass(const Rectangle& shape, const Material& material) {
  return widened(shell_lumped_mass(shape, material));
}

ElementMatrix<24> turned_about_x(const ElementMatrix<24>& own, double angle) {
  const double c = std::cos(angle), s = std::sin(angle);
  ElementMatrix<24> t;  // own unknowns from the turned ones
  for (int triple = 0; triple < 24; triple += 3) {
    t(triple, triple) = 1;
    t(triple + 1, triple + 1) = t(triple + 2, triple + 2) = c;
    t(triple + 1, triple + 2) = s;
    t(triple + 2, triple + 1) = -s;
  }
  return congruence(own, t);
}

}  // namespace stanchion::specimen
