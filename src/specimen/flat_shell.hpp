// The flat plate element of 5 unknowns a node: membrane and bending side by side, drilling rotation absent.
#pragma once

#include "specimen/element_matrix.hpp"
#include "specimen/plate_bending.hpp"

namespace stanchion::specimen {

/// Unknowns ux uy uz rx ry of each corner in the order of Rectangle. `offset` is the height (m) of the
/// plate's middle surface above the nodes: at 0 membrane and bending are uncoupled, otherwise they are
/// coupled through ux + offset * ry and uy - offset * rx. Six zero eigenvalues.
ElementMatrix<20> shell_stiffness(const Rectangle& shape, const Material& material, double offset = 0);

/// Geometric stiffness of a constant in-plane force acting in the middle surface: uz, rx, ry only.
ElementMatrix<20> shell_geometric(const Rectangle& shape, const MembraneForce& force);

/// Consistent mass, rotary inertia neglected (positive definite all the same).
ElementMatrix<20> shell_mass(const Rectangle& shape, const Material& material, double offset = 0);

/// Lumped mass: a quarter of the plate at ux, uy, uz of each corner, nothing at the rotations.
ElementMatrix<20> shell_lumped_mass(const Rectangle& shape, const Material& material);

}  // namespace stanchion::specimen
