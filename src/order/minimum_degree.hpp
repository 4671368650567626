// Approximate minimum degree by AMD, the only file that includes it.
#pragma once

#include "order/graph.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Approximate minimum degree order: vertex_at[k] is the vertex eliminated k-th. Vertex weights are ignored.
/// Amestoy, Davis, Duff, SIAM J. Matrix Anal. Appl. 17 (1996). Reproducible, thread safe.
/// Errors: resource limit when memory runs out.
Result<Buffer<Index>> minimum_degree(const Graph& graph);

}  // namespace stanchion
