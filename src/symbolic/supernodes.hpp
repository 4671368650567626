// Supernodes: runs of columns with (nearly) one structure, eliminated together as one front.
#pragma once

#include <vector>

#include "base/buffer.hpp"
#include "order/ordering.hpp"

namespace stanchion {

/// The supernodal elimination tree over vertices of the elimination graph.
struct SupernodeTree {
  Index supernodes = 0;
  Buffer<Index> vertex_at;                    ///< postordered elimination order of the vertices
  std::vector<Index> parent;                  ///< per supernode, -1 for a root; children precede parents
  std::vector<std::vector<Index>> positions;  ///< elimination positions (into vertex_at) of each, in order
  std::vector<Offset> pivots;                 ///< equations eliminated in each
  std::vector<Offset> front_rows;             ///< rows of each front
  Offset factor_entries = 0;                  ///< of L, diagonal included, without relaxation zeros
  double flops = 0;                           ///< without relaxation zeros
};

/// Fundamental supernodes from column counts, then relaxed amalgamation: a child joins its parent when the
/// explicit zeros that brings stay below a share that falls with the size of the front (Ashcraft and Grimes,
/// ACM TOMS 15 (1989)). Consumes elimination.vertex_at's order. Cost: nearly linear in the graph.
SupernodeTree build_supernodes(const Elimination& elimination);

}  // namespace stanchion
