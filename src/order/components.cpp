#include "order/components.hpp"

#include <vector>

namespace stanchion {

Components connected_components(const Graph& graph) {
  Components components{0, Buffer<Index>(graph.vertices, -1)};
  std::vector<Index> stack;
  for (Index root = 0; root < graph.vertices; ++root) {
    if (components.component_of[root] >= 0) continue;
    const Index number = components.count++;
    components.component_of[root] = number;
    stack.push_back(root);
    while (!stack.empty()) {
      const Index v = stack.back();
      stack.pop_back();
      for (Offset k = graph.start[v]; k < graph.start[Offset{v} + 1]; ++k) {
        const Index w = graph.adjacency[k];
        if (components.component_of[w] >= 0) continue;
        components.component_of[w] = number;
        stack.push_back(w);
      }
    }
  }
  return components;
}

Graph subgraph(const Graph& graph, const Buffer<Index>& local_number, const Index* vertices, Index count) {
  Offset edges = 0;
  for (Index i = 0; i < count; ++i) edges += graph.start[Offset{vertices[i]} + 1] - graph.start[vertices[i]];
  Graph part{count, Buffer<Offset>(Offset{count} + 1), Buffer<Index>(edges), Buffer<Index>(count)};
  Offset used = 0;
  for (Index i = 0; i < count; ++i) {
    const Index v = vertices[i];
    part.start[i] = used;
    part.weight[i] = graph.weight[v];
    for (Offset k = graph.start[v]; k < graph.start[Offset{v} + 1]; ++k) {
      const Index neighbour = local_number[graph.adjacency[k]];
      part.adjacency[used] = neighbour;
      used += neighbour >= 0 ? 1 : 0;
    }
  }
  part.start[count] = used;
  part.adjacency.shrink(used);
  return part;
}

}  // namespace stanchion
