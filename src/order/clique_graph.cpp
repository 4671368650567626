#include "order/clique_graph.hpp"

#include <vector>

namespace stanchion {
namespace {

constexpr Index kNone = -1;

/// Grows one clique at a time.
class CliqueGrower {
 public:
  CliqueGrower(const Graph& graph, Grouping& grouping)
      : graph_(graph), grouping_(grouping), neighbour_of_(static_cast<std::size_t>(graph.vertices), 0) {}

  /// The clique that begins with `first`, as the next group.
  void grow(Index first, Index most) {
    Index last = first;
    grouping_.group_of[last] = grouping_.groups;
    for (Index size = 1; size < most; ++size) {
      last = next_member(last, size);
      if (last == kNone) break;
      grouping_.group_of[last] = grouping_.groups;
    }
    ++grouping_.groups;
    for (const Index v : reached_) neighbour_of_[static_cast<std::size_t>(v)] = 0;
    reached_.clear();
  }

 private:
  /// The first free neighbour of `last`, the newest of `size` members, that is adjacent to all of them.
  Index next_member(Index last, Index size) {
    Index chosen = kNone;
    for (Offset e = graph_.start[last]; e < graph_.start[Offset{last} + 1]; ++e) {
      const Index v = graph_.adjacency[e];
      if (grouping_.group_of[v] != kNone) continue;
      Index& members = neighbour_of_[static_cast<std::size_t>(v)];
      if (members == 0) reached_.push_back(v);
      if (++members == size && chosen == kNone) chosen = v;
    }
    return chosen;
  }

  const Graph& graph_;
  Grouping& grouping_;
  std::vector<Index> neighbour_of_;  ///< so many members of the clique
  std::vector<Index> reached_;       ///< vertices where that is not 0
};

}  // namespace

Grouping group_by_clique(const Graph& graph, Index most) {
  Grouping grouping{0, Buffer<Index>(graph.vertices, kNone)};
  CliqueGrower grower(graph, grouping);
  for (Index v = 0; v < graph.vertices; ++v) {
    if (grouping.group_of[v] == kNone) grower.grow(v, most);
  }
  return grouping;
}

Graph contract(const Graph& graph, const Grouping& grouping) {
  const Index groups = grouping.groups;
  const Members members = members_of(grouping);
  Graph coarse{groups, Buffer<Offset>(Offset{groups} + 1), Buffer<Index>(graph.adjacency.size()),
               Buffer<Index>(groups)};
  std::vector<Index> seen_from(static_cast<std::size_t>(groups), kNone);
  Offset used = 0;
  for (Index g = 0; g < groups; ++g) {
    coarse.start[g] = used;
    coarse.weight[g] = 0;
    seen_from[static_cast<std::size_t>(g)] = g;
    for (Offset m = members.start[g]; m < members.start[Offset{g} + 1]; ++m) {
      const Index v = members.row[m];
      coarse.weight[g] += graph.weight[v];
      for (Offset e = graph.start[v]; e < graph.start[Offset{v} + 1]; ++e) {
        const Index h = grouping.group_of[graph.adjacency[e]];
        if (seen_from[static_cast<std::size_t>(h)] == g) continue;
        seen_from[static_cast<std::size_t>(h)] = g;
        coarse.adjacency[used++] = h;
      }
    }
  }
  coarse.start[groups] = used;
  coarse.adjacency.shrink(used);
  return coarse;
}

}  // namespace stanchion
