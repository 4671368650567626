// An undirected graph with weighted vertices: what orderings and elimination trees work on.
#pragma once

#include "base/buffer.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// Both directions of every edge are stored, no loops, no duplicates.
struct Graph {
  Index vertices = 0;
  Buffer<Offset> start;     ///< vertices + 1
  Buffer<Index> adjacency;  ///< start[vertices] neighbours
  Buffer<Index> weight;     ///< equations a vertex stands for, >= 1
};

}  // namespace stanchion
