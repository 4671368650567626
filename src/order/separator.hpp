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
  /// Where a level of a breadth-first search is a tenth better than METIS's separator or was not set against
  /// one: its cost over the two thirds power of the weight. 0 otherwise.
  double level_cost = 0;
};
constexpr int kSeparator = 2;

/// A small separator of a connected graph that leaves sides of about equal weight; a side may be empty. Where
/// grouping by cliques makes the graph much smaller (nodes of surfaces and of bodies), METIS cuts the
/// smaller one, and its refinement (Fiduccia and Mattheyses, 1982, in METIS's form) mends the cut on each
/// finer one. Otherwise (bars, lattices) METIS's separator is set against level_separator's, refined
/// likewise; it is not asked for where the level costs no more than `level_cost` of the part that this one
/// was cut from. Errors: resource limit when METIS runs out of memory. Reproducible (fixed seed).
Result<Separation> separate(const Graph& graph, double level_cost = 0);

}  // namespace stanchion
