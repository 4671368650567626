// A coarser graph for finding separators: a finite element couples all its nodes with each other, so the
// graph is full of cliques, and vertices of one clique mostly end on the same side of a good cut.
#pragma once

#include "order/quotient_graph.hpp"

namespace stanchion {

/// Groups the vertices by disjoint cliques of at most `most` members, grown greedily in the order of their
/// numbers: each next member is a neighbour of the last one and adjacent to all before it. Cost: a pass over
/// the adjacency.
Grouping group_by_clique(const Graph& graph, Index most);

/// The graph whose vertices are the groups, joined when any of their members are; weights are summed.
/// Cost: a pass over the adjacency.
Graph contract(const Graph& graph, const Grouping& grouping);

}  // namespace stanchion
