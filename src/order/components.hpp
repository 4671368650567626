// Connected parts of a graph.
#pragma once

#include "order/graph.hpp"

namespace stanchion {

/// Part number of every vertex, parts numbered by their lowest vertex. Cost: one pass over the edges.
struct Components {
  Index count = 0;
  Buffer<Index> component_of;
};
Components connected_components(const Graph& graph);

/// The subgraph on `count` `vertices`, renumbered 0, 1, ... in that order. `local_number` of a neighbour
/// outside is negative, and the edge to it left out.
Graph subgraph(const Graph& graph, const Buffer<Index>& local_number, const Index* vertices, Index count);

}  // namespace stanchion
