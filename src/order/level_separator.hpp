// A vertex separator among the levels of a breadth-first search.
#pragma once

#include <metis.h>

#include <vector>

#include "order/graph.hpp"

namespace stanchion {

/// Weight of the separator over the product of the sides' shares of the whole weight: of two separators of a
/// graph the one that costs less leads to fewer operations. `side` is 0 or 1 or kSeparator for each vertex;
/// infinite when a side is empty, and for no sides at all. Cost: one pass.
double separator_cost(const Graph& graph, const std::vector<idx_t>& side);

/// The level that costs least among those which leave each side at least three tenths of the weight. The
/// search starts at the end of a longest path it can find (George and Liu, 1979): a corner. In a lattice of
/// bars the levels seen from a corner are sloping planes, a quarter smaller than straight ones. Empty when
/// the graph is not connected or no level qualifies. Cost: some four passes over the graph. Reproducible.
std::vector<idx_t> level_separator(const Graph& graph);

}  // namespace stanchion
