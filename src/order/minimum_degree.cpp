#include "order/minimum_degree.hpp"

#include <amd.h>

#include <vector>

namespace stanchion {

Result<Buffer<Index>> minimum_degree(const Graph& graph) {
  const auto n = static_cast<std::size_t>(graph.vertices);
  std::vector<SuiteSparse_long> start(graph.start.begin(), graph.start.end());
  std::vector<SuiteSparse_long> adjacency(graph.adjacency.begin(), graph.adjacency.end());
  std::vector<SuiteSparse_long> perm(n);
  const auto status =
      amd_l_order(graph.vertices, start.data(), adjacency.data(), perm.data(), nullptr, nullptr);
  if (status != AMD_OK && status != AMD_OK_BUT_JUMBLED) {
    return Status::resource_limit("ordering-memory", "minimum degree ordering ran out of memory", "",
                                  "free memory or use a smaller model");
  }
  Buffer<Index> vertex_at(graph.vertices);
  for (Index k = 0; k < graph.vertices; ++k)
    vertex_at[k] = static_cast<Index>(perm[static_cast<std::size_t>(k)]);
  return vertex_at;
}

}  // namespace stanchion
