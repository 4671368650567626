#include "order/elimination_tree.hpp"

namespace stanchion {

Buffer<Index> elimination_tree(const Graph& graph, const Buffer<Index>& vertex_at,
                               const Buffer<Index>& position_of) {
  const Index n = graph.vertices;
  Buffer<Index> parent(n, -1), ancestor(n, -1);
  for (Index k = 0; k < n; ++k) {
    const Index v = vertex_at[k];
    for (Offset e = graph.start[v]; e < graph.start[Offset{v} + 1]; ++e) {
      // Climb from the earlier neighbour to the root of its current tree, pointing the path at k.
      for (Index node = position_of[graph.adjacency[e]]; node >= 0 && node < k;) {
        const Index next = ancestor[node];
        ancestor[node] = k;
        if (next < 0) parent[node] = k;
        node = next;
      }
    }
  }
  return parent;
}

Buffer<Index> postorder(const Buffer<Index>& parent) {
  const auto n = static_cast<Index>(parent.size());
  Buffer<Index> first_child(n, -1), next_sibling(n, -1), order(n), stack(n);
  Index first_root = -1;
  for (Index v = n - 1; v >= 0; --v) {
    Index& head = parent[v] < 0 ? first_root : first_child[parent[v]];
    next_sibling[v] = head;
    head = v;
  }
  Index visited = 0;
  for (Index root = first_root; root >= 0; root = next_sibling[root]) {
    Index depth = 0;
    stack[depth++] = root;
    while (depth > 0) {
      const Index top = stack[depth - 1];
      const Index child = first_child[top];
      if (child >= 0) {
        first_child[top] = next_sibling[child];
        stack[depth++] = child;
      } else {
        order[visited++] = top;
        --depth;
      }
    }
  }
  return order;
}

}  // namespace stanchion
