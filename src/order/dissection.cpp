#include "order/dissection.hpp"

#include <metis.h>

#include <limits>
#include <vector>

namespace stanchion {
namespace {

/// A view of `data` in METIS's index width, through `copy` when the widths differ.
template <class T>
idx_t* as_metis(const Buffer<T>& data, std::vector<idx_t>& copy) {
  copy.assign(data.begin(), data.end());
  return copy.data();
}

}  // namespace

Result<Buffer<Index>> nested_dissection(const Graph& graph) {
  if (graph.adjacency.size() > std::numeric_limits<idx_t>::max()) {
    return Status::resource_limit("metis-index-width",
                                  "the graph has " + std::to_string(graph.adjacency.size()) +
                                      " edge ends, more than this METIS build can index",
                                  "", "give the dof map (--dofs) so that nodes, not equations, are ordered");
  }
  idx_t vertices = graph.vertices;
  std::vector<idx_t> start, adjacency, weight;
  std::vector<idx_t> perm(static_cast<std::size_t>(vertices)), inverse(static_cast<std::size_t>(vertices));
  idx_t options[METIS_NOPTIONS];
  METIS_SetDefaultOptions(options);
  options[METIS_OPTION_NUMBERING] = 0;
  options[METIS_OPTION_COMPRESS] = 0;  // the graph is compressed already, and only then are weights honoured
  options[METIS_OPTION_CCORDER] = 0;
  options[METIS_OPTION_SEED] = 42;
  const int status =
      METIS_NodeND(&vertices, as_metis(graph.start, start), as_metis(graph.adjacency, adjacency),
                   as_metis(graph.weight, weight), options, perm.data(), inverse.data());
  if (status != METIS_OK) {
    return Status::resource_limit("ordering-memory", "nested dissection ran out of memory", "",
                                  "free memory or use a smaller model");
  }
  Buffer<Index> vertex_at(vertices);
  for (Index k = 0; k < vertices; ++k) vertex_at[k] = static_cast<Index>(perm[static_cast<std::size_t>(k)]);
  return vertex_at;
}

}  // namespace stanchion
