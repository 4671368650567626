#include "order/column_counts.hpp"

#include "order/elimination_tree.hpp"
#include "order/permutation.hpp"

namespace stanchion {
namespace {

/// Disjoint sets over positions, for least common ancestors in the postordered tree.
Index find_root(Buffer<Index>& set, Index node) {
  Index root = node;
  while (set[root] != root) root = set[root];
  while (set[node] != root) {
    const Index next = set[node];
    set[node] = root;
    node = next;
  }
  return root;
}

}  // namespace

Buffer<Offset> column_counts(const Graph& graph, const Buffer<Index>& vertex_at,
                             const Buffer<Index>& position_of, const Buffer<Index>& parent) {
  const Index n = graph.vertices;
  // The row subtree of k (columns j with L_kj nonzero) has leaves where the skeleton has entries. Each leaf
  // adds the row's weight to the path from it upwards; where two paths meet (their least common ancestor) one
  // of the two is taken off again, and at the parent of k the path ends. Summing up the tree gives the
  // counts.
  Buffer<Offset> count(n);
  Buffer<Index> first_descendant(n, -1), last_first(n, -1), previous_leaf(n, -1), set(n);
  for (Index k = 0; k < n; ++k) {
    set[k] = k;
    for (Index node = k; node >= 0 && first_descendant[node] < 0; node = parent[node])
      first_descendant[node] = k;
  }
  // The vertex itself: its own weight starts on its own position and stops below its parent.
  for (Index k = 0; k < n; ++k) count[k] = 0;
  for (Index k = 0; k < n; ++k) {
    const Offset weight = graph.weight[vertex_at[k]];
    if (first_descendant[k] == k)
      count[k] += weight;  // a leaf of the tree is the leaf of its own row subtree
    if (parent[k] >= 0) count[parent[k]] -= weight;
  }
  for (Index j = 0; j < n; ++j) {
    const Index v = vertex_at[j];
    for (Offset e = graph.start[v]; e < graph.start[Offset{v} + 1]; ++e) {
      const Index i = position_of[graph.adjacency[e]];
      if (i <= j) continue;
      // j is a leaf of the row subtree of i when no earlier column of that row lies below it.
      if (last_first[i] >= first_descendant[j]) continue;
      const Offset weight = graph.weight[graph.adjacency[e]];
      count[j] += weight;
      if (previous_leaf[i] >= 0) count[find_root(set, previous_leaf[i])] -= weight;
      previous_leaf[i] = j;
      last_first[i] = first_descendant[j];
    }
    if (parent[j] >= 0) set[j] = parent[j];
  }
  for (Index k = 0; k < n; ++k) {
    if (parent[k] >= 0) count[parent[k]] += count[k];
  }
  return count;
}

double factor_flops(const Graph& graph, const Buffer<Index>& vertex_at, const Buffer<Offset>& count) {
  double flops = 0;
  for (Index k = 0; k < graph.vertices; ++k) {
    const Index weight = graph.weight[vertex_at[k]];
    for (Index c = 0; c < weight; ++c) {
      const auto length = static_cast<double>(count[k] - c);
      flops += length * length;
    }
  }
  return flops;
}

double predicted_flops(const Graph& graph, const Buffer<Index>& vertex_at) {
  const Buffer<Index> parent = elimination_tree(graph, vertex_at, inverse_of(vertex_at));
  const Buffer<Index> post = postorder(parent);
  const Buffer<Index> rank = inverse_of(post);
  Buffer<Index> ordered(post.size()), ordered_parent(post.size());
  for (Offset k = 0; k < post.size(); ++k) {
    ordered[k] = vertex_at[post[k]];
    ordered_parent[k] = parent[post[k]] < 0 ? -1 : rank[parent[post[k]]];
  }
  return factor_flops(graph, ordered, column_counts(graph, ordered, inverse_of(ordered), ordered_parent));
}

}  // namespace stanchion
