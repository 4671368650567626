// Elimination tree and its postorder.
#pragma once

#include "order/graph.hpp"

namespace stanchion {

/// parent[k] of the k-th eliminated vertex (elimination positions, not vertex numbers); -1 for a root.
/// `vertex_at[k]` is the vertex eliminated k-th, `position_of` its inverse.
/// Liu, ACM TOMS 12 (1986): path compression over ancestors. Cost: nearly linear in the edges.
Buffer<Index> elimination_tree(const Graph& graph, const Buffer<Index>& vertex_at,
                               const Buffer<Index>& position_of);

/// Postorder of a forest given by parents: order[k] is the node visited k-th; children ascend. Cost: linear.
Buffer<Index> postorder(const Buffer<Index>& parent);

}  // namespace stanchion
