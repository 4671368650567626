// The node cloud thinned to what a screen can show, with every node that a finding names still in it.
#pragma once

#include <vector>

#include "stanchion/located.hpp"

namespace stanchion {

struct ReducedModel {
  std::vector<std::size_t> kept;               ///< ascending: index in the picture of each node that is kept
  std::vector<std::pair<Index, Index>> links;  ///< pairs of positions in `kept`, ascending, none twice
  std::size_t links_left_out = 0;              ///< beyond the limit
  double cell =
      0;  ///< edge of the cubes that hold one node each, in the unit of places; 0: nothing was left out
};

/// At most `most_nodes` nodes and `most_links` links. Kept first: the nodes that directions rank, those that
/// move in each direction, and those that lose many digits, all of them or the largest and an even part; the
/// rest of the room goes to one node a cube of a grid, the one nearest to its middle. Links go between what
/// stands for their ends. Where all nodes fit, all are kept. Reproducible; O(nodes + links) for a fixed
/// limit. Precondition: most_nodes >= 100.
ReducedModel reduce_model(const LocateOutcome& located, std::size_t most_nodes, std::size_t most_links);

}  // namespace stanchion
