#include "specimen/block_mesh.hpp"

#include <algorithm>
#include <cmath>

#include "specimen/brick.hpp"

namespace stanchion::specimen {

BlockMesh mesh_for(Offset unknowns, double width) {
  const double target = static_cast<double>(unknowns);
  BlockMesh mesh;
  Index m = 1;
  while (6.0 * (m + 1) * (m + 2) * (m + 2) <= target) ++m;
  mesh.ny = mesh.nz = m;
  mesh.nx = std::max<Index>(2, static_cast<Index>(std::lround(target / (3.0 * mesh.layer()))));
  mesh.length = 2 * width;
  mesh.width = mesh.height = width;
  return mesh;
}

Index add_block(Model& model, const BlockMesh& mesh, const Material& material, MassKind mass) {
  const double dx = mesh.length / mesh.nx, dy = mesh.width / mesh.ny, dz = mesh.height / mesh.nz;
  const Index first = model.table.nodes();
  for (Index i = 0; i <= mesh.nx; ++i) {
    for (Index j = 0; j <= mesh.ny; ++j) {
      for (Index k = 0; k <= mesh.nz; ++k) {
        model.table.add_node({mesh.start_x + i * dx, j * dy, k * dz}, kDisplacements);
      }
    }
  }
  Part bricks{8, kDisplacements, {}, {}, {}, {}};
  bricks.nodes.reserve(static_cast<std::size_t>(8) * static_cast<std::size_t>(mesh.nx * mesh.ny * mesh.nz));
  for (Index i = 0; i < mesh.nx; ++i) {
    for (Index j = 0; j < mesh.ny; ++j) {
      for (Index k = 0; k < mesh.nz; ++k) {
        for (const Index up : {0, 1}) {
          for (const Index node : {mesh.node(i, j, k + up), mesh.node(i + 1, j, k + up),
                                   mesh.node(i + 1, j + 1, k + up), mesh.node(i, j + 1, k + up)}) {
            bricks.nodes.push_back(first + node);
          }
        }
      }
    }
  }
  const BrickCorners corners{
      {{0, 0, 0}, {dx, 0, 0}, {dx, dy, 0}, {0, dy, 0}, {0, 0, dz}, {dx, 0, dz}, {dx, dy, dz}, {0, dy, dz}}};
  const Coupling all = full_coupling(kDisplacements);
  bricks.stiffness = PartMatrix{all, same_for_all(brick_stiffness(corners, material))};
  if (mass == MassKind::kConsistent) {
    bricks.mass = PartMatrix{all, same_for_all(brick_mass(corners, material))};
  } else {
    Coupling diagonal{};
    for (std::size_t c = 0; c < 3; ++c) diagonal[c] = static_cast<DofSet>(1U << c);
    bricks.mass = PartMatrix{diagonal, same_for_all(brick_lumped_mass(corners, material))};
  }
  model.parts.push_back(std::move(bricks));
  return first;
}

}  // namespace stanchion::specimen
