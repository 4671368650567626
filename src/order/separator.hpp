// A vertex separator of a graph, by METIS.
#pragma once

#include <vector>

#include "order/graph.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Two sides without an edge between them, and the vertices that part them.
struct Separation {
  std::vector<int> side;    ///< of each vertex: 0 or 1, or kSeparator
  bool by_cliques = false;  ///< found on a graph of cliques first: a third to two thirds of the time
};
constexpr int kSeparator = 2;

/// A small separator of a connected graph that leaves sides of about equal weight; a side may be empty. Where
/// grouping by cliques makes the graph much smaller (nodes of surfaces and of bodies), METIS cuts the
/// smaller one, and its refinement (Fiduccia and Mattheyses, 1982, in METIS's form) mends the cut on each
/// finer graph. Errors: resource limit when METIS runs out of memory. Reproducible (fixed seed).
Result<Separation> separate(const Graph& graph);

}  // namespace stanchion
