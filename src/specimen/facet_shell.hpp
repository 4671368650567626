// The flat plate element of 6 unknowns a node, turned into space: facets of a curved shell.
#pragma once

#include "specimen/element_matrix.hpp"
#include "specimen/plate_bending.hpp"

namespace stanchion::specimen {

/// Unknowns ux uy uz rx ry rz of each corner in the order of Rectangle, in the element's own axes: membrane,
/// bending, and a stiffness that ties rz to the turning of the membrane, after Hughes and Brezzi, "On
/// drilling degrees of freedom", Comput. Methods Appl. Mech. Engrg. 72 (1989) 105-121 (from memory). Nothing
/// resists a rigid motion: six zero eigenvalues.
ElementMatrix<24> facet_stiffness(const Rectangle& shape, const Material& material);

/// Geometric stiffness of a constant force along x only (N/m, tension positive): of the slopes along x of uy
/// and uz. A strip that a compressive force pushes may leave its line within the facet as well as out of it.
ElementMatrix<24> facet_geometric(const Rectangle& shape, double force_x);

/// Consistent mass, rotary inertia neglected; nothing at rz.
ElementMatrix<24> facet_mass(const Rectangle& shape, const Material& material);

/// Lumped mass: a quarter of the plate at ux, uy, uz of each corner, nothing at the rotations.
ElementMatrix<24> facet_lumped_mass(const Rectangle& shape, const Material& material);

/// The matrix in axes with the same x, its own y being (0, cos `angle`, sin `angle`) there; angle in rad.
ElementMatrix<24> turned_about_x(const ElementMatrix<24>& own, double angle);

}  // namespace stanchion::specimen
