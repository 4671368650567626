#include "symbolic/assembly_tree.hpp"

#include <algorithm>
#include <vector>

#include "dense/block_lower.hpp"

namespace stanchion {
namespace {

/// Supernodes in processing order: at every node the child whose subtree needs most beyond what it leaves
/// behind goes first.
std::vector<Index> processing_order(const SupernodeTree& tree) {
  const auto count = static_cast<std::size_t>(tree.supernodes);
  std::vector<std::vector<Index>> children(count);
  std::vector<Index> roots;
  std::vector<double> peak(count), left(count);
  const auto by_need = [&](Index a, Index b) {
    const auto ia = static_cast<std::size_t>(a), ib = static_cast<std::size_t>(b);
    return peak[ia] - left[ia] > peak[ib] - left[ib];
  };
  for (std::size_t s = 0; s < count; ++s) {
    auto& mine = children[s];
    std::stable_sort(mine.begin(), mine.end(), by_need);
    double stacked = 0, highest = 0;
    for (const Index child : mine) {
      highest = std::max(highest, stacked + peak[static_cast<std::size_t>(child)]);
      stacked += left[static_cast<std::size_t>(child)];
    }
    const auto order = static_cast<Index>(tree.front_rows[s]);
    const auto below = static_cast<Index>(tree.front_rows[s] - tree.pivots[s]);
    peak[s] = std::max(highest, stacked + static_cast<double>(front_layout(order).size()));
    left[s] = static_cast<double>(contribution_doubles(below));
    if (tree.parent[s] >= 0) {
      children[static_cast<std::size_t>(tree.parent[s])].push_back(static_cast<Index>(s));
    } else {
      roots.push_back(static_cast<Index>(s));
    }
  }
  std::vector<Index> order;
  order.reserve(count);
  std::vector<std::pair<Index, std::size_t>> stack;
  for (const Index root : roots) {
    stack.push_back({root, 0});
    while (!stack.empty()) {
      auto& [node, next] = stack.back();
      const auto& mine = children[static_cast<std::size_t>(node)];
      if (next < mine.size()) {
        const Index child = mine[next++];
        stack.push_back({child, 0});
      } else {
        order.push_back(node);
        stack.pop_back();
      }
    }
  }
  return order;
}

/// First elimination position of every vertex of the graph, and the numbering of the equations.
void number_equations(const Elimination& elimination, const SupernodeTree& supernodes,
                      const std::vector<Index>& order, AssemblyTree& tree, Buffer<Index>& first_of_vertex) {
  const Graph& graph = elimination.graph;
  Index position = 0;
  for (Index f = 0; f < tree.fronts; ++f) {
    tree.first_column[f] = position;
    for (const Index k : supernodes.positions[static_cast<std::size_t>(order[static_cast<std::size_t>(f)])]) {
      const Index v = supernodes.vertex_at[k];
      first_of_vertex[v] = position;
      position += graph.weight[v];
    }
  }
  tree.first_column[tree.fronts] = position;
  Buffer<Index> next = first_of_vertex.clone();
  for (Index i = 0; i < tree.rows; ++i) {
    const Index at = next[elimination.grouping.group_of[i]]++;
    tree.position_of[i] = at;
    tree.equation_at[at] = i;
  }
}

/// The vertices below each front, merged from the graph and the children, as ascending positions.
void list_rows(const Elimination& elimination, const SupernodeTree& supernodes,
               const std::vector<Index>& order, const Buffer<Index>& first_of_vertex, AssemblyTree& tree) {
  const Graph& graph = elimination.graph;
  std::vector<std::vector<Index>> below(static_cast<std::size_t>(tree.fronts));  // vertices
  std::vector<std::vector<Index>> children(static_cast<std::size_t>(tree.fronts));
  std::vector<Index> seen(static_cast<std::size_t>(graph.vertices), -1);
  tree.row_start[0] = 0;
  std::vector<Index> rows;
  for (Index f = 0; f < tree.fronts; ++f) {
    auto& mine = below[static_cast<std::size_t>(f)];
    const Index end = tree.first_column[Offset{f} + 1];
    const auto add = [&](Index v) {
      if (first_of_vertex[v] < end || seen[static_cast<std::size_t>(v)] == f) return;
      seen[static_cast<std::size_t>(v)] = f;
      mine.push_back(v);
    };
    for (const Index k : supernodes.positions[static_cast<std::size_t>(order[static_cast<std::size_t>(f)])]) {
      const Index v = supernodes.vertex_at[k];
      for (Offset e = graph.start[v]; e < graph.start[Offset{v} + 1]; ++e) add(graph.adjacency[e]);
    }
    for (const Index child : children[static_cast<std::size_t>(f)]) {
      for (const Index v : below[static_cast<std::size_t>(child)]) add(v);
      std::vector<Index>().swap(below[static_cast<std::size_t>(child)]);
    }
    std::sort(mine.begin(), mine.end(),
              [&](Index a, Index b) { return first_of_vertex[a] < first_of_vertex[b]; });
    for (const Index v : mine) {
      for (Index c = 0; c < graph.weight[v]; ++c) rows.push_back(first_of_vertex[v] + c);
    }
    tree.row_start[Offset{f} + 1] = static_cast<Offset>(rows.size());
    if (tree.parent[f] >= 0) children[static_cast<std::size_t>(tree.parent[f])].push_back(f);
  }
  tree.rows_below = Buffer<Index>(static_cast<Offset>(rows.size()));
  std::copy(rows.begin(), rows.end(), tree.rows_below.begin());
}

}  // namespace

AssemblyTree build_assembly_tree(const Elimination& elimination, const SupernodeTree& supernodes) {
  const auto rows = static_cast<Index>(elimination.grouping.group_of.size());
  const Index fronts = supernodes.supernodes;
  AssemblyTree tree;
  tree.rows = rows;
  tree.fronts = fronts;
  tree.position_of = Buffer<Index>(rows);
  tree.equation_at = Buffer<Index>(rows);
  tree.first_column = Buffer<Index>(Offset{fronts} + 1);
  tree.row_start = Buffer<Offset>(Offset{fronts} + 1);
  tree.parent = Buffer<Index>(fronts);
  tree.component = Buffer<Index>(fronts);
  tree.components = elimination.components;
  const std::vector<Index> order = processing_order(supernodes);
  std::vector<Index> rank(order.size());
  for (std::size_t f = 0; f < order.size(); ++f)
    rank[static_cast<std::size_t>(order[f])] = static_cast<Index>(f);
  for (Index f = 0; f < fronts; ++f) {
    const auto s = static_cast<std::size_t>(order[static_cast<std::size_t>(f)]);
    const Index up = supernodes.parent[s];
    tree.parent[f] = up < 0 ? -1 : rank[static_cast<std::size_t>(up)];
    tree.component[f] =
        elimination.component_of_vertex[supernodes.vertex_at[supernodes.positions[s].front()]];
  }
  Buffer<Index> first_of_vertex(elimination.graph.vertices);
  number_equations(elimination, supernodes, order, tree, first_of_vertex);
  list_rows(elimination, supernodes, order, first_of_vertex, tree);
  return tree;
}

std::vector<std::vector<Index>> children_of(const AssemblyTree& tree) {
  std::vector<std::vector<Index>> children(static_cast<std::size_t>(tree.fronts));
  for (Index f = 0; f < tree.fronts; ++f) {
    if (tree.parent[f] >= 0) children[static_cast<std::size_t>(tree.parent[f])].push_back(f);
  }
  return children;
}

}  // namespace stanchion
