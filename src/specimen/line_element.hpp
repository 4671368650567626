// The 4-unknown bending line that plane and space beams are made of: cubic deflection (Euler-Bernoulli).
#pragma once

#include "specimen/element_matrix.hpp"

namespace stanchion::specimen {

/// Unknowns v1, v1', v2, v2' (deflection and slope at either end) of a line of length L.
/// Source: Przemieniecki, Theory of Matrix Structural Analysis, 1968 (from memory).
inline ElementMatrix<4> line_bending(double flexural_rigidity, double length) {
  const double k = flexural_rigidity / (length * length * length), l = length;
  return {{12 * k, 6 * l * k, -12 * k, 6 * l * k, 6 * l * k, 4 * l * l * k, -6 * l * k, 2 * l * l * k,
           -12 * k, -6 * l * k, 12 * k, -6 * l * k, 6 * l * k, 2 * l * l * k, -6 * l * k, 4 * l * l * k}};
}

/// Geometric stiffness of the axial force (tension positive): integral of N v'^2.
inline ElementMatrix<4> line_geometric(double axial_force, double length) {
  const double g = axial_force / (30 * length), l = length;
  return {{36 * g, 3 * l * g, -36 * g, 3 * l * g, 3 * l * g, 4 * l * l * g, -3 * l * g, -l * l * g, -36 * g,
           -3 * l * g, 36 * g, -3 * l * g, 3 * l * g, -l * l * g, -3 * l * g, 4 * l * l * g}};
}

/// Consistent mass of the deflection: integral of rho A v^2, rotary inertia neglected.
inline ElementMatrix<4> line_mass(double mass_per_length, double length) {
  const double m = mass_per_length * length / 420, l = length;
  return {{156 * m, 22 * l * m, 54 * m, -13 * l * m, 22 * l * m, 4 * l * l * m, 13 * l * m, -3 * l * l * m,
           54 * m, 13 * l * m, 156 * m, -22 * l * m, -13 * l * m, -3 * l * l * m, -22 * l * m,
           4 * l * l * m}};
}

}  // namespace stanchion::specimen
