#include "symbolic/supernodes.hpp"

#include <algorithm>

#include "order/column_counts.hpp"
#include "order/elimination_tree.hpp"
#include "order/permutation.hpp"

namespace stanchion {
namespace {

struct Columns {
  Buffer<Index> vertex_at, parent;
  Buffer<Offset> count;
};

/// Postordered elimination tree with column counts.
Columns count_columns(const Elimination& elimination) {
  const Buffer<Index> parent =
      elimination_tree(elimination.graph, elimination.vertex_at, inverse_of(elimination.vertex_at));
  const Buffer<Index> post = postorder(parent);
  const Buffer<Index> rank = inverse_of(post);
  Columns columns{Buffer<Index>(post.size()), Buffer<Index>(post.size()), {}};
  for (Offset k = 0; k < post.size(); ++k) {
    columns.vertex_at[k] = elimination.vertex_at[post[k]];
    columns.parent[k] = parent[post[k]] < 0 ? -1 : rank[parent[post[k]]];
  }
  columns.count =
      column_counts(elimination.graph, columns.vertex_at, inverse_of(columns.vertex_at), columns.parent);
  return columns;
}

/// Share of explicit zeros a front with `pivots` columns may hold.
double zero_share_allowed(Offset pivots) {
  if (pivots <= 8) return 1.0;
  if (pivots <= 16) return 0.6;
  if (pivots <= 32) return 0.2;
  if (pivots <= 64) return 0.08;
  return 0.02;
}

struct Candidate {
  Offset pivots, rows, zeros;
};

/// The front that child and parent make together.
Candidate merged(const Candidate& child, const Candidate& parent) {
  const Offset added = child.pivots * (parent.rows - (child.rows - child.pivots));
  return {child.pivots + parent.pivots, child.pivots + parent.rows, child.zeros + parent.zeros + added};
}

bool worth_merging(const Candidate& front) {
  const double entries = static_cast<double>(front.pivots) *
                         (static_cast<double>(front.rows) - 0.5 * static_cast<double>(front.pivots - 1));
  return static_cast<double>(front.zeros) <= zero_share_allowed(front.pivots) * entries;
}

struct Fundamental {
  std::vector<Index> first;   ///< first position of each, plus the end
  std::vector<Index> parent;  ///< supernode
  std::vector<Candidate> front;
};

Fundamental fundamental_supernodes(const Graph& graph, const Columns& columns) {
  const Index n = graph.vertices;
  std::vector<Index> children(static_cast<std::size_t>(n), 0);
  for (Index k = 0; k < n; ++k) {
    if (columns.parent[k] >= 0) ++children[static_cast<std::size_t>(columns.parent[k])];
  }
  Fundamental result;
  std::vector<Index> supernode_of(static_cast<std::size_t>(n));
  for (Index k = 0; k < n; ++k) {
    const bool joins = k > 0 && columns.parent[k - 1] == k && children[static_cast<std::size_t>(k)] == 1 &&
                       columns.count[k] == columns.count[k - 1] - graph.weight[columns.vertex_at[k - 1]];
    if (!joins) {
      result.first.push_back(k);
      result.front.push_back({0, columns.count[k], 0});
    }
    result.front.back().pivots += graph.weight[columns.vertex_at[k]];
    supernode_of[static_cast<std::size_t>(k)] = static_cast<Index>(result.first.size()) - 1;
  }
  result.first.push_back(n);
  for (std::size_t s = 0; s + 1 < result.first.size(); ++s) {
    const Index up = columns.parent[result.first[s + 1] - 1];
    result.parent.push_back(up < 0 ? -1 : supernode_of[static_cast<std::size_t>(up)]);
  }
  return result;
}

/// Which supernode each one ends up in (itself when it stays), children before parents.
std::vector<Index> amalgamate(Fundamental& tree) {
  const auto count = tree.front.size();
  std::vector<Index> into(count);
  std::vector<std::vector<Index>> children(count);
  for (std::size_t s = 0; s < count; ++s) {
    into[s] = static_cast<Index>(s);
    if (tree.parent[s] >= 0)
      children[static_cast<std::size_t>(tree.parent[s])].push_back(static_cast<Index>(s));
  }
  for (std::size_t s = 0; s < count; ++s) {
    auto& mine = children[s];
    // The child with the longest column shares most with the parent; try it first.
    std::stable_sort(mine.begin(), mine.end(), [&](Index a, Index b) {
      const auto& fa = tree.front[static_cast<std::size_t>(a)];
      const auto& fb = tree.front[static_cast<std::size_t>(b)];
      return fa.rows - fa.pivots > fb.rows - fb.pivots;
    });
    for (const Index child : mine) {
      const Candidate together = merged(tree.front[static_cast<std::size_t>(child)], tree.front[s]);
      if (!worth_merging(together)) continue;
      tree.front[s] = together;
      into[static_cast<std::size_t>(child)] = static_cast<Index>(s);
    }
    mine.clear();
    mine.shrink_to_fit();
  }
  return into;
}

}  // namespace

SupernodeTree build_supernodes(const Elimination& elimination) {
  const Graph& graph = elimination.graph;
  Columns columns = count_columns(elimination);
  Fundamental tree = fundamental_supernodes(graph, columns);
  const auto count = tree.front.size();
  std::vector<Index> into = amalgamate(tree);

  SupernodeTree result;
  result.flops = factor_flops(graph, columns.vertex_at, columns.count);
  for (Index k = 0; k < graph.vertices; ++k) {
    const Offset weight = graph.weight[columns.vertex_at[k]];
    result.factor_entries += weight * columns.count[k] - weight * (weight - 1) / 2;
  }
  // Survivors keep their relative order, which is a postorder still; members go in with children first.
  std::vector<Index> number(count, -1);
  for (std::size_t s = count; s-- > 0;) {
    if (into[s] != static_cast<Index>(s)) into[s] = into[static_cast<std::size_t>(into[s])];
  }
  for (std::size_t s = 0; s < count; ++s) {
    if (into[s] == static_cast<Index>(s)) number[s] = result.supernodes++;
  }
  result.positions.resize(static_cast<std::size_t>(result.supernodes));
  for (std::size_t s = 0; s < count; ++s) {
    auto& list = result.positions[static_cast<std::size_t>(number[static_cast<std::size_t>(into[s])])];
    for (Index k = tree.first[s]; k < tree.first[s + 1]; ++k) list.push_back(k);
    if (into[s] != static_cast<Index>(s)) continue;
    const Index up = tree.parent[s];
    result.parent.push_back(up < 0 ? -1
                                   : number[static_cast<std::size_t>(into[static_cast<std::size_t>(up)])]);
    result.pivots.push_back(tree.front[s].pivots);
    result.front_rows.push_back(tree.front[s].rows);
  }
  result.vertex_at = std::move(columns.vertex_at);
  return result;
}

}  // namespace stanchion
