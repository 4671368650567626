#include "specimen/flat_shell.hpp"

namespace stanchion::specimen {
namespace {

/// Places the 8 membrane and the 12 bending unknowns into the 20 of the shell.
ElementMatrix<20> combined(const ElementMatrix<8>& membrane, const ElementMatrix<12>& bending) {
  ElementMatrix<20> shell;
  for (int a = 0; a < 4; ++a) {
    for (int b = 0; b < 4; ++b) {
      for (int i = 0; i < 2; ++i) {
        for (int j = 0; j < 2; ++j) shell(5 * a + i, 5 * b + j) = membrane(2 * a + i, 2 * b + j);
      }
      for (int i = 0; i < 3; ++i) {
        for (int j = 0; j < 3; ++j) shell(5 * a + 2 + i, 5 * b + 2 + j) = bending(3 * a + i, 3 * b + j);
      }
    }
  }
  return shell;
}

ElementMatrix<20> lifted(const ElementMatrix<20>& middle, double offset) {
  if (offset == 0) return middle;
  ElementMatrix<20> t;
  for (int i = 0; i < 20; ++i) t(i, i) = 1;
  for (int corner = 0; corner < 4; ++corner) {
    t(5 * corner, 5 * corner + 4) = offset;
    t(5 * corner + 1, 5 * corner + 3) = -offset;
  }
  return congruence(middle, t);
}

}  // namespace

ElementMatrix<20> shell_stiffness(const Rectangle& shape, const Material& material, double offset) {
  return lifted(combined(membrane_stiffness(shape, material), bending_stiffness(shape, material)), offset);
}

ElementMatrix<20> shell_geometric(const Rectangle& shape, const MembraneForce& force) {
  return combined(ElementMatrix<8>{}, bending_geometric(shape, force));
}

ElementMatrix<20> shell_mass(const Rectangle& shape, const Material& material, double offset) {
  return lifted(combined(membrane_mass(shape, material), bending_mass(shape, material)), offset);
}

ElementMatrix<20> shell_lumped_mass(const Rectangle& shape, const Material& material) {
  const double quarter = material.density * shape.length * shape.width * shape.thickness / 4;
  ElementMatrix<20> m;
  for (int corner = 0; corner < 4; ++corner) {
    for (int i = 0; i < 3; ++i) m(5 * corner + i, 5 * corner + i) = quarter;
  }
  return m;
}

}  // namespace stanchion::specimen
