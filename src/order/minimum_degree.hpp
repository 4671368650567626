// Approximate minimum degree by AMD and CAMD, the only file that includes them.
#pragma once

#include "order/graph.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Approximate minimum degree order: vertex_at[k] is the vertex eliminated k-th. Vertex weights are ignored.
/// Amestoy, Davis, Duff, SIAM J. Matrix Anal. Appl. 17 (1996). Reproducible, thread safe.
/// Errors: resource limit when memory runs out.
Result<Buffer<Index>> minimum_degree(const Graph& graph);

/// The same for the first `inside` vertices alone, by the degrees they have with the others around them:
/// those are eliminated later and are not part of the order, but what is eliminated before them is joined to
/// them. The constrained order of Chen, Davis, Hager and Rajamanickam, ACM Trans. Math. Softw. 35 (2008),
/// used as the halo of Pellegrini, Roman and Amestoy, Concurrency: Pract. Exper. 12 (2000). Errors: resource
/// limit when memory runs out or the edges are too many for 32-bit numbers.
Result<Buffer<Index>> minimum_degree_within(const Graph& graph, Index inside);

}  // namespace stanchion
