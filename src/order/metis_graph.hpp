// A graph as METIS takes it.
#pragma once

#include <metis.h>

#include <array>
#include <vector>

#include "order/graph.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

constexpr idx_t kMetisSeed = 42;

/// A copy in METIS's index width, with the options of every call.
struct MetisGraph {
  explicit MetisGraph(const Graph& graph)
      : vertices(graph.vertices),
        start(graph.start.begin(), graph.start.end()),
        adjacency(graph.adjacency.begin(), graph.adjacency.end()),
        weight(graph.weight.begin(), graph.weight.end()) {
    METIS_SetDefaultOptions(options.data());
    options[METIS_OPTION_NUMBERING] = 0;
    options[METIS_OPTION_COMPRESS] =
        0;  // the graph is compressed already, and only then are weights honoured
    options[METIS_OPTION_CCORDER] = 0;
    options[METIS_OPTION_SEED] = kMetisSeed;
  }

  idx_t vertices;
  std::vector<idx_t> start, adjacency, weight;
  std::array<idx_t, METIS_NOPTIONS> options;
};

inline Status metis_out_of_memory() {
  return Status::resource_limit("ordering-memory", "nested dissection ran out of memory", "",
                                "free memory or use a smaller model");
}

}  // namespace stanchion
