// Entries of every column of the factor, without forming it.
#pragma once

#include "order/graph.hpp"

namespace stanchion {

/// count[k] = total weight of the vertices in column k of L, the diagonal's own weight included.
/// Positions must be a postorder of `parent`. Gilbert, Ng, Peyton, SIAM J. Matrix Anal. Appl. 15 (1994).
/// Cost: nearly linear in the edges.
Buffer<Offset> column_counts(const Graph& graph, const Buffer<Index>& vertex_at,
                             const Buffer<Index>& position_of, const Buffer<Index>& parent);

/// Sum over equations of (entries in its column)^2: the floating point operations of the factorization, to
/// leading order. A vertex of weight w stands for w columns that shrink by one each.
double factor_flops(const Graph& graph, const Buffer<Index>& vertex_at, const Buffer<Offset>& count);

/// Operations of the factorization in this order, which need not be a postorder. Cost: elimination tree and
/// column counts.
double predicted_flops(const Graph& graph, const Buffer<Index>& vertex_at);

}  // namespace stanchion
