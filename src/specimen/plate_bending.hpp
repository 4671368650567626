// The 12-unknown rectangle for thin plates (Kirchhoff), of Adini, Clough and Melosh.
#pragma once

#include "specimen/element_matrix.hpp"
#include "specimen/material.hpp"
#include "specimen/membrane.hpp"

namespace stanchion::specimen {

/// In-plane forces per unit length, N/m; tension positive.
struct MembraneForce {
  double x = 0, y = 0, xy = 0;
};

/// Bending stiffness; unknowns w, rx = dw/dy, ry = -dw/dx of each corner in the order of Rectangle.
/// Incomplete quartic: nonconforming in slope, passes the patch test on rectangles, eigenvalues converge as
/// h^2 (usually from below). Three zero eigenvalues. Source: Adini and Clough, report to the National Science
/// Foundation G7337, 1961; Melosh, AIAA J. 1 (1963) 1631-1637; shape functions as in Zienkiewicz and Taylor,
/// vol. 2, ch. 4 (all from memory).
ElementMatrix<12> bending_stiffness(const Rectangle& shape, const Material& material);

/// Geometric stiffness of a constant in-plane force, integral of (grad w)^T N (grad w), exactly integrated.
/// Negative semidefinite for compression: the critical factors f of K + f G are then positive.
ElementMatrix<12> bending_geometric(const Rectangle& shape, const MembraneForce& force);

/// Consistent mass of the transverse displacement, rotary inertia neglected.
ElementMatrix<12> bending_mass(const Rectangle& shape, const Material& material);

}  // namespace stanchion::specimen
