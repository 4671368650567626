// A regular block of bricks: shared by the solid and the saddle models.
#pragma once

#include "specimen/model.hpp"

namespace stanchion::specimen {

struct BlockMesh {
  Index nx = 1, ny = 1, nz = 1;              ///< bricks along x, y, z
  double length = 1, width = 1, height = 1;  ///< along x, y, z, m
  double start_x = 0;

  Index layer() const { return (ny + 1) * (nz + 1); }  ///< nodes in one plane x = constant
  Index node(Index i, Index j, Index k) const { return (i * (ny + 1) + j) * (nz + 1) + k; }
};

/// Bricks for about `unknowns` equations in a block twice as long as wide and high, one face clamped.
BlockMesh mesh_for(Offset unknowns, double width);

/// Adds the nodes (x slowest, z fastest) and the bricks, with stiffness and mass; returns the first node.
Index add_block(Model& model, const BlockMesh& mesh, const Material& material, MassKind mass);

}  // namespace stanchion::specimen
