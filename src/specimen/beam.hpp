// The space beam of 12 unknowns (Euler-Bernoulli, Saint-Venant torsion) and the bar with pinned ends.
#pragma once

#include "specimen/element_matrix.hpp"
#include "specimen/material.hpp"

namespace stanchion::specimen {

/// A straight member. The local x axis runs from `start` to `end`; the local z axis lies in the plane of x
/// and `up`, on the side of `up`, which must not be parallel to the member; y completes the right-handed
/// frame.
struct Member {
  Point start, end;
  Point up{0, 0, 1};
};

/// Global unknowns ux uy uz rx ry rz of the start, then of the end. Six zero eigenvalues.
/// Source: Przemieniecki, Theory of Matrix Structural Analysis, 1968, ch. 5 and 15 (from memory).
ElementMatrix<12> beam_stiffness(const Member& member, const Material& material, const Section& section);

/// Consistent geometric stiffness of the axial force `axial_force` (N, tension positive), in both planes; the
/// twist term of second order is left out.
ElementMatrix<12> beam_geometric(const Member& member, double axial_force);

/// Consistent mass, with the polar moment in twist; rotary inertia of bending neglected.
ElementMatrix<12> beam_mass(const Member& member, const Material& material, const Section& section);

/// Lumped mass: half of the member at the displacements of either end, nothing at the rotations.
ElementMatrix<12> beam_lumped_mass(const Member& member, const Material& material, const Section& section);

/// A bar: the axial part only, the rotations untouched (zero rows).
ElementMatrix<12> bar_stiffness(const Member& member, const Material& material, const Section& section);

/// A stretched bar: axial_force / length across its axis, nothing along it.
ElementMatrix<12> bar_geometric(const Member& member, double axial_force);

/// The direction that `Member::up` should have: global z, or global x for a vertical member.
Point natural_up(const Point& start, const Point& end);

double length_of(const Member& member);

}  // namespace stanchion::specimen
