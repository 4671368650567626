// The 4-node rectangle in plane stress: the in-plane part of the flat plate.
#pragma once

#include "specimen/element_matrix.hpp"
#include "specimen/material.hpp"

namespace stanchion::specimen {

/// A rectangle with sides along x and y and constant thickness. Corners (-,-) (+,-) (+,+) (-,+).
struct Rectangle {
  double length = 0;     ///< along x, m
  double width = 0;      ///< along y, m
  double thickness = 0;  ///< m
};

/// Bilinear ux, uy with 2 x 2 Gauss; unknowns ux uy of corner 0, of corner 1, ... Three zero eigenvalues.
ElementMatrix<8> membrane_stiffness(const Rectangle& shape, const Material& material);

/// Consistent mass of the in-plane displacements.
ElementMatrix<8> membrane_mass(const Rectangle& shape, const Material& material);

}  // namespace stanchion::specimen
