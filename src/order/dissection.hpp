// Nested dissection by METIS.
#pragma once

#include "order/graph.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Nested-dissection order of a connected graph: vertex_at[k] is the vertex eliminated k-th.
/// Karypis and Kumar, SIAM J. Sci. Comput. 20 (1998). Vertex weights are honoured.
/// The first levels of a large graph are cut here, one separator a call of separate(), so that up to
/// `threads` threads can order the parts; they do where generator_is_per_thread(). The order is the same for
/// any number of threads. Errors: resource limit when the graph has more edges than METIS's index width can
/// hold, or it runs out of memory. METIS replaces the process's SIGTERM handler while it runs;
/// cli/interrupt.cpp prevents that. Reproducible (fixed seed); not safe to call from two threads at once.
Result<Buffer<Index>> nested_dissection(const Graph& graph, int threads);

/// True when srand() and rand(), which METIS draws from, have a state of their own in each thread: so in a
/// program that links order/thread_random.cpp. Found by trying, once.
bool generator_is_per_thread();

}  // namespace stanchion
