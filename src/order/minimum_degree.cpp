#include "order/minimum_degree.hpp"

#include <amd.h>
#include <camd.h>

#include <algorithm>
#include <limits>
#include <vector>

namespace stanchion {
namespace {

Status out_of_memory() {
  return Status::resource_limit("ordering-memory", "minimum degree ordering ran out of memory", "",
                                "free memory or use a smaller model");
}

}  // namespace

Result<Buffer<Index>> minimum_degree(const Graph& graph) {
  const auto n = static_cast<std::size_t>(graph.vertices);
  std::vector<SuiteSparse_long> start(graph.start.begin(), graph.start.end());
  std::vector<SuiteSparse_long> adjacency(graph.adjacency.begin(), graph.adjacency.end());
  std::vector<SuiteSparse_long> perm(n);
  const auto status =
      amd_l_order(graph.vertices, start.data(), adjacency.data(), perm.data(), nullptr, nullptr);
  if (status != AMD_OK && status != AMD_OK_BUT_JUMBLED) return out_of_memory();
  Buffer<Index> vertex_at(graph.vertices);
  for (Index k = 0; k < graph.vertices; ++k)
    vertex_at[k] = static_cast<Index>(perm[static_cast<std::size_t>(k)]);
  return vertex_at;
}

Result<Buffer<Index>> minimum_degree_within(const Graph& graph, Index inside) {
  if (graph.adjacency.size() > std::numeric_limits<int>::max()) return out_of_memory();
  std::vector<int> start(graph.start.begin(), graph.start.end());
  std::vector<int> adjacency(graph.adjacency.begin(), graph.adjacency.end());
  std::vector<int> later(static_cast<std::size_t>(graph.vertices), 1), perm(later.size());
  std::fill_n(later.begin(), inside, 0);
  const int status =
      camd_order(graph.vertices, start.data(), adjacency.data(), perm.data(), nullptr, nullptr, later.data());
  if (status != CAMD_OK && status != CAMD_OK_BUT_JUMBLED) return out_of_memory();
  Buffer<Index> vertex_at(inside);
  std::copy_n(perm.begin(), inside, vertex_at.begin());
  return vertex_at;
}

}  // namespace stanchion
