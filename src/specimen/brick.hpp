// The 8-node brick: trilinear displacements, full 2 x 2 x 2 Gauss integration.
#pragma once

#include <array>

#include "specimen/element_matrix.hpp"
#include "specimen/material.hpp"

namespace stanchion::specimen {

/// Corners in the order (-,-,-) (+,-,-) (+,+,-) (-,+,-), then the same four at the upper face. Any convex
/// hexahedron with a positive Jacobian. Unknowns: ux uy uz of corner 0, of corner 1, and so on.
using BrickCorners = std::array<Point, 8>;

/// Stiffness of isotropic linear elasticity. Six zero eigenvalues, the rigid motions.
/// Source: Zienkiewicz and Taylor, The Finite Element Method, vol. 1, ch. 8 (from memory).
ElementMatrix<24> brick_stiffness(const BrickCorners& corners, const Material& material);

/// Consistent mass with the same rule; positive definite.
ElementMatrix<24> brick_mass(const BrickCorners& corners, const Material& material);

/// Row-sum lumped mass: diagonal.
ElementMatrix<24> brick_lumped_mass(const BrickCorners& corners, const Material& material);

}  // namespace stanchion::specimen
