#include "symbolic/assembly_tree.hpp"

#include <algorithm>
#include <functional>
#include <span>
#include <utility>
#include <vector>

#include "base/threads.hpp"
#include "dense/block_lower.hpp"

namespace stanchion {
namespace {

constexpr Index kSubtreesPerWorker = 8;  // at least so many: they differ in size

/// Where the k-th of `pieces` equal runs of [0, count) begins.
Index share(Index count, Offset k, int pieces) {
  return static_cast<Index>(Offset{count} * k / pieces);
}

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
    left[s] = static_cast<double>(contribution_numbers(below));
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

/// The vertices of the graph as the fronts eliminate them: front f has [first[f], first[f + 1]).
struct VertexOrder {
  Buffer<Index> first;
  Buffer<Index> vertex_at, place_of;  ///< each the inverse of the other
  Buffer<Index> first_equation;       ///< elimination position of each place's first equation
};

VertexOrder number_equations(const Elimination& elimination, const SupernodeTree& supernodes,
                             const std::vector<Index>& order, AssemblyTree& tree) {
  const Graph& graph = elimination.graph;
  VertexOrder vertices{Buffer<Index>(Offset{tree.fronts} + 1), Buffer<Index>(graph.vertices),
                       Buffer<Index>(graph.vertices), Buffer<Index>(graph.vertices)};
  Index place = 0, position = 0;
  for (Index f = 0; f < tree.fronts; ++f) {
    tree.first_column[f] = position;
    vertices.first[f] = place;
    for (const Index k : supernodes.positions[static_cast<std::size_t>(order[static_cast<std::size_t>(f)])]) {
      const Index v = supernodes.vertex_at[k];
      vertices.vertex_at[place] = v;
      vertices.place_of[v] = place;
      vertices.first_equation[place++] = position;
      position += graph.weight[v];
    }
  }
  tree.first_column[tree.fronts] = position;
  vertices.first[tree.fronts] = place;
  Buffer<Index> next = vertices.first_equation.clone();
  for (Index i = 0; i < tree.rows; ++i) {
    const Index at = next[vertices.place_of[elimination.grouping.group_of[i]]]++;
    tree.position_of[i] = at;
    tree.equation_at[at] = i;
  }
  return vertices;
}

/// Runs of fronts that are whole subtrees, to be worked on apart, and what is left above them.
struct SubtreeCut {
  std::vector<std::pair<Index, Index>> subtrees;  ///< [first, end)
  std::vector<Index> above;                       ///< ascending
};

SubtreeCut cut_subtrees(const AssemblyTree& tree, Index largest) {
  std::vector<Index> size(static_cast<std::size_t>(tree.fronts), 1);
  for (Index f = 0; f < tree.fronts; ++f) {
    if (tree.parent[f] >= 0)
      size[static_cast<std::size_t>(tree.parent[f])] += size[static_cast<std::size_t>(f)];
  }
  SubtreeCut cut;
  for (Index f = 0; f < tree.fronts; ++f) {
    const Index mine = size[static_cast<std::size_t>(f)], up = tree.parent[f];
    if (mine > largest) {
      cut.above.push_back(f);
    } else if (up < 0 || size[static_cast<std::size_t>(up)] > largest) {
      cut.subtrees.push_back({f + 1 - mine, f + 1});
    }
  }
  return cut;
}

/// The vertices below each front, as ascending places in the order of elimination.
class RowLists {
 public:
  RowLists(const Elimination& elimination, const VertexOrder& vertices, const AssemblyTree& tree)
      : graph_(elimination.graph),
        vertices_(vertices),
        tree_(tree),
        list_of_(static_cast<std::size_t>(tree.fronts)) {}

  /// Lists fronts [first, end), children before parents, into `store`; children outside are listed already.
  /// `seen` holds a front number a place, -1 at first, and is used by one thread at a time.
  void list(Index first, Index end, std::vector<Index>& store, std::vector<Index>& seen) {
    for (Index f = first; f < end; ++f) {
      const std::size_t start = store.size();
      const Index behind = vertices_.first[Offset{f} + 1];
      const auto add = [&](Index place) {
        if (place < behind || seen[static_cast<std::size_t>(place)] == f) return;
        seen[static_cast<std::size_t>(place)] = f;
        store.push_back(place);
      };
      for (Index place = vertices_.first[f]; place < behind; ++place) {
        const Index v = vertices_.vertex_at[place];
        for (Offset e = graph_.start[v]; e < graph_.start[Offset{v} + 1]; ++e) {
          add(vertices_.place_of[graph_.adjacency[e]]);
        }
      }
      for (const Index child : tree_.children(f)) {
        const List& below = list_of_[static_cast<std::size_t>(child)];
        for (std::size_t k = below.start; k < below.end; ++k) add((*below.store)[k]);
      }
      std::sort(store.begin() + static_cast<std::ptrdiff_t>(start), store.end());
      list_of_[static_cast<std::size_t>(f)] = {&store, start, store.size()};
    }
  }

  /// Equations in the list of a front.
  Offset equations(Index front) const {
    Offset sum = 0;
    for (const Index place : list(front)) sum += weight(place);
    return sum;
  }

  /// Writes their elimination positions.
  void write(Index front, Index* positions) const {
    for (const Index place : list(front)) {
      for (Index c = 0; c < weight(place); ++c) *positions++ = vertices_.first_equation[place] + c;
    }
  }

 private:
  struct List {
    const std::vector<Index>* store = nullptr;
    std::size_t start = 0, end = 0;
  };

  std::span<const Index> list(Index front) const {
    const List& mine = list_of_[static_cast<std::size_t>(front)];
    return {mine.store->data() + mine.start, mine.end - mine.start};
  }
  Index weight(Index place) const { return graph_.weight[vertices_.vertex_at[place]]; }

  const Graph& graph_;
  const VertexOrder& vertices_;
  const AssemblyTree& tree_;
  std::vector<List> list_of_;
};

/// Fills the row lists of the tree, subtrees apart in several threads where a pool is given.
void list_rows(const Elimination& elimination, const VertexOrder& vertices, ThreadPool* pool,
               AssemblyTree& tree) {
  const int workers = pool == nullptr ? 1 : pool->size();
  const SubtreeCut cut = cut_subtrees(tree, tree.fronts / (kSubtreesPerWorker * workers));
  RowLists lists(elimination, vertices, tree);
  std::vector<std::vector<Index>> store(cut.subtrees.size() + 1), seen(static_cast<std::size_t>(workers));
  const auto for_all = [&](Offset pieces, const std::function<void(Offset, int)>& work) {
    if (pool != nullptr) return pool->run(pieces, work);
    for (Offset k = 0; k < pieces; ++k) work(k, 0);
  };
  const auto list = [&](Index first, Index end, std::size_t piece, int worker) {
    auto& mine = seen[static_cast<std::size_t>(worker)];
    mine.resize(static_cast<std::size_t>(elimination.graph.vertices), -1);
    lists.list(first, end, store[piece], mine);
  };
  for_all(static_cast<Offset>(cut.subtrees.size()), [&](Offset k, int worker) {
    const auto [first, end] = cut.subtrees[static_cast<std::size_t>(k)];
    list(first, end, static_cast<std::size_t>(k), worker);
  });
  for (const Index f : cut.above) list(f, f + 1, cut.subtrees.size(), 0);

  for_all(workers, [&](Offset k, int) {
    for (Index f = share(tree.fronts, k, workers); f < share(tree.fronts, k + 1, workers); ++f) {
      tree.row_start[Offset{f} + 1] = lists.equations(f);
    }
  });
  tree.row_start[0] = 0;
  for (Index f = 0; f < tree.fronts; ++f) tree.row_start[Offset{f} + 1] += tree.row_start[f];
  tree.rows_below = Buffer<Index>(tree.row_start[tree.fronts]);
  for_all(workers, [&](Offset k, int) {
    for (Index f = share(tree.fronts, k, workers); f < share(tree.fronts, k + 1, workers); ++f) {
      lists.write(f, tree.rows_below.data() + tree.row_start[f]);
    }
  });
}

}  // namespace

void link_children(AssemblyTree& tree) {
  tree.child_start = Buffer<Index>(Offset{tree.fronts} + 1, 0);
  Index linked = 0;
  for (Index f = 0; f < tree.fronts; ++f) {
    if (tree.parent[f] < 0) continue;
    ++tree.child_start[Offset{tree.parent[f]} + 1];
    ++linked;
  }
  for (Index f = 0; f < tree.fronts; ++f) tree.child_start[Offset{f} + 1] += tree.child_start[f];
  tree.child = Buffer<Index>(linked);
  Buffer<Index> next = tree.child_start.clone();
  for (Index f = 0; f < tree.fronts; ++f) {
    if (tree.parent[f] >= 0) tree.child[next[tree.parent[f]]++] = f;
  }
}

AssemblyTree build_assembly_tree(const Elimination& elimination, const SupernodeTree& supernodes,
                                 ThreadPool* pool) {
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
  link_children(tree);
  const VertexOrder vertices = number_equations(elimination, supernodes, order, tree);
  list_rows(elimination, vertices, pool, tree);
  return tree;
}

}  // namespace stanchion
