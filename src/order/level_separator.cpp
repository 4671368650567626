#include "order/level_separator.hpp"

#include <algorithm>
#include <array>
#include <limits>
#include <numeric>

#include "order/separator.hpp"

namespace stanchion {
namespace {

constexpr double kLeastSide = 0.3;
constexpr double kInfinite = std::numeric_limits<double>::infinity();
constexpr int kMostSearches = 5;

double cost_of(double separator, double one_side, double other_side) {
  const double whole = separator + one_side + other_side, product = one_side * other_side;
  return product > 0 ? separator * whole * whole / product : kInfinite;
}

/// What a breadth-first search finds.
struct Levels {
  std::vector<Index> order;  ///< vertices as they were reached
  std::vector<Index> start;  ///< where each level begins in it, plus the end
  std::vector<Index> level;  ///< of each vertex; -1 when it was not reached
  Index count() const { return static_cast<Index>(start.size()) - 1; }
};

Levels levels_from(const Graph& graph, Index root) {
  Levels found{{root}, {}, std::vector<Index>(static_cast<std::size_t>(graph.vertices), -1)};
  found.order.reserve(static_cast<std::size_t>(graph.vertices));
  found.level[static_cast<std::size_t>(root)] = 0;
  for (std::size_t at = 0; at < found.order.size();) {
    const std::size_t end = found.order.size();
    const auto next = static_cast<Index>(found.start.size()) + 1;
    found.start.push_back(static_cast<Index>(at));
    for (; at < end; ++at) {
      const Index v = found.order[at];
      for (Offset e = graph.start[v]; e < graph.start[Offset{v} + 1]; ++e) {
        const Index neighbour = graph.adjacency[e];
        if (found.level[static_cast<std::size_t>(neighbour)] >= 0) continue;
        found.level[static_cast<std::size_t>(neighbour)] = next;
        found.order.push_back(neighbour);
      }
    }
  }
  found.start.push_back(static_cast<Index>(found.order.size()));
  return found;
}

/// The vertex of fewest neighbours in the last level.
Index outermost(const Graph& graph, const Levels& levels) {
  const auto degree = [&](Index v) { return graph.start[Offset{v} + 1] - graph.start[v]; };
  const std::size_t begin = static_cast<std::size_t>(levels.start[levels.start.size() - 2]);
  Index found = levels.order[begin];
  for (std::size_t k = begin; k < levels.order.size(); ++k) {
    if (degree(levels.order[k]) < degree(found)) found = levels.order[k];
  }
  return found;
}

/// Levels seen from where there are most of them.
Levels longest_levels(const Graph& graph) {
  Levels longest = levels_from(graph, 0);
  for (int search = 1; search < kMostSearches; ++search) {
    Levels other = levels_from(graph, outermost(graph, longest));
    const bool longer = other.count() > longest.count();
    if (longer || search == 1) longest = std::move(other);
    if (!longer) break;
  }
  return longest;
}

/// The number of the level to cut at; 0 when none qualifies.
Index cheapest(const Graph& graph, const Levels& levels) {
  std::vector<double> weight(static_cast<std::size_t>(levels.count()), 0);
  for (Index v = 0; v < graph.vertices; ++v) {
    weight[static_cast<std::size_t>(levels.level[static_cast<std::size_t>(v)])] += graph.weight[v];
  }
  const double whole = std::accumulate(weight.begin(), weight.end(), 0.0);
  double below = 0, least = kInfinite;
  Index found = 0;
  for (std::size_t k = 0; k < weight.size(); ++k) {
    const double above = whole - below - weight[k], cost = cost_of(weight[k], below, above);
    if (std::min(below, above) >= kLeastSide * whole && cost < least) {
      least = cost;
      found = static_cast<Index>(k);
    }
    below += weight[k];
  }
  return found;
}

}  // namespace

double separator_cost(const Graph& graph, const std::vector<idx_t>& side) {
  std::array<double, 3> weight{};
  for (std::size_t v = 0; v < side.size(); ++v) {
    weight[static_cast<std::size_t>(side[v])] += graph.weight[static_cast<Offset>(v)];
  }
  return cost_of(weight[kSeparator], weight[0], weight[1]);
}

std::vector<idx_t> level_separator(const Graph& graph) {
  if (graph.vertices == 0) return {};
  const Levels levels = longest_levels(graph);
  if (static_cast<Index>(levels.order.size()) < graph.vertices) return {};
  const Index chosen = cheapest(graph, levels);
  if (chosen == 0) return {};
  std::vector<idx_t> side(static_cast<std::size_t>(graph.vertices));
  for (std::size_t v = 0; v < side.size(); ++v) {
    side[v] = levels.level[v] < chosen ? 0 : levels.level[v] > chosen ? 1 : kSeparator;
  }
  return side;
}

}  // namespace stanchion
