#include "order/separator.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdlib>
#include <limits>
#include <numeric>

#include "order/clique_graph.hpp"
#include "order/level_separator.hpp"
#include "order/metis_graph.hpp"

namespace stanchion {
namespace {

constexpr Index kCliqueMembers = 8;     // at most; plates shrink to a quarter, bodies to an eighth
constexpr Index kCoarsenAbove = 1'000;  // vertices; a smaller graph is cut as soon as made coarser
constexpr double kShrinks = 3.5;        // so many times at least: pairs and triples (of bars) mislead
constexpr int kCoarser = 2;             // graphs below the finest
constexpr double kHeaviest = 1.3;       // a side, in the mean of both
constexpr double kWorthRefining = 1.1;  // cost of a level, in METIS's
constexpr double kClearlyBetter = 0.9;  // the same, refined
constexpr double kAsGood = 1.1;         // in the cost of the level that made the part
/// The room a refinement has: less than a twentieth finds much larger separators.
constexpr double kLeastRoom = 1.05, kMostRoom = 1.2;

/// How much heavier the heavier side may become, so that the imbalances of several refinements do not
/// multiply.
float room_to_move(const MetisGraph& graph, const std::vector<idx_t>& side) {
  std::array<double, 3> weight{};
  for (std::size_t v = 0; v < side.size(); ++v) weight[static_cast<std::size_t>(side[v])] += graph.weight[v];
  const double mean = (weight[0] + weight[1]) / 2, heavier = std::max({1.0, weight[0], weight[1]});
  return static_cast<float>(std::clamp(kHeaviest * mean / heavier, kLeastRoom, kMostRoom));
}

Status refine(MetisGraph& graph, std::vector<idx_t>& side) {
  std::vector<idx_t> free(side.size(), -1);  // every vertex may move
  std::srand(kMetisSeed);                    // it draws numbers without setting a seed
  const int status =
      METIS_NodeRefine(graph.vertices, graph.start.data(), graph.weight.data(), graph.adjacency.data(),
                       side.data(), free.data(), room_to_move(graph, side));
  return status == METIS_OK ? Status{} : metis_out_of_memory();
}

Status separate_whole(MetisGraph& graph, std::vector<idx_t>& side) {
  idx_t separator_weight = 0;
  const int status =
      METIS_ComputeVertexSeparator(&graph.vertices, graph.start.data(), graph.adjacency.data(),
                                   graph.weight.data(), graph.options.data(), &separator_weight, side.data());
  return status == METIS_OK ? Status{} : metis_out_of_memory();
}

/// Groups that make the graph much smaller; none otherwise.
Grouping worthwhile_cliques(const Graph& graph) {
  if (graph.vertices <= kCoarsenAbove) return {};
  Grouping cliques = group_by_clique(graph, kCliqueMembers);
  if (cliques.groups * kShrinks > graph.vertices) return {};
  return cliques;
}

Status separate_by_cliques(const Graph& graph, const Grouping& cliques, int coarser,
                           std::vector<idx_t>& side);

/// Fills `side`, on coarser graphs first where that pays.
Status separate_coarse(const Graph& graph, int coarser, std::vector<idx_t>& side) {
  const Grouping cliques = coarser > 0 ? worthwhile_cliques(graph) : Grouping{};
  if (cliques.groups > 0) return separate_by_cliques(graph, cliques, coarser, side);
  MetisGraph same(graph);
  return separate_whole(same, side);
}

Status separate_by_cliques(const Graph& graph, const Grouping& cliques, int coarser,
                           std::vector<idx_t>& side) {
  const Graph coarse = contract(graph, cliques);
  std::vector<idx_t> side_of_clique(static_cast<std::size_t>(coarse.vertices));
  Status done = separate_coarse(coarse, coarser - 1, side_of_clique);
  if (!done.ok()) return done;
  for (Index v = 0; v < graph.vertices; ++v) {
    side[static_cast<std::size_t>(v)] = side_of_clique[static_cast<std::size_t>(cliques.group_of[v])];
  }
  MetisGraph same(graph);
  return refine(same, side);
}

/// METIS's separator, or a level where that costs less.
Result<Separation> separate_by_metis_or_level(const Graph& graph, double level_cost) {
  const double power = std::pow(std::accumulate(graph.weight.begin(), graph.weight.end(), 0.0), 2.0 / 3);
  MetisGraph same(graph);
  std::vector<idx_t> side(static_cast<std::size_t>(graph.vertices)), level = level_separator(graph);
  const double unrefined = separator_cost(graph, level);
  double cost = std::numeric_limits<double>::infinity();
  if (unrefined > kAsGood * level_cost * power) {
    Status done = separate_whole(same, side);
    if (!done.ok()) return done;
    cost = separator_cost(graph, side);
  }
  Separation found;
  if (unrefined < kWorthRefining * cost) {
    Status done = refine(same, level);
    if (!done.ok()) return done;
    const double refined = separator_cost(graph, level);
    if (refined < kClearlyBetter * cost) found.level_cost = refined / power;
    if (refined < cost) side = std::move(level);
  }
  found.side.assign(side.begin(), side.end());
  return found;
}

}  // namespace

Result<Separation> separate(const Graph& graph, double level_cost) {
  const Grouping cliques = worthwhile_cliques(graph);
  if (cliques.groups == 0) return separate_by_metis_or_level(graph, level_cost);
  std::vector<idx_t> side(static_cast<std::size_t>(graph.vertices));
  Status done = separate_by_cliques(graph, cliques, kCoarser, side);
  if (!done.ok()) return done;
  return Separation{{side.begin(), side.end()}, true, 0};
}

}  // namespace stanchion
