#include "order/separator.hpp"

#include <algorithm>
#include <array>
#include <cstdlib>

#include "order/clique_graph.hpp"
#include "order/metis_graph.hpp"

namespace stanchion {
namespace {

constexpr Index kCliqueMembers = 8;     // at most; plates shrink to a quarter, bodies to an eighth
constexpr Index kCoarsenAbove = 1'000;  // vertices; a smaller graph is cut as soon as made coarser
constexpr double kShrinks = 3.5;        // so many times at least: pairs and triples (of bars) mislead
constexpr int kCoarser = 2;             // graphs below the finest
constexpr double kHeaviest = 1.3;       // a side, in the mean of both
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

/// Fills `side`; true when the graph was made coarser first.
Result<bool> separate(const Graph& graph, int coarser, std::vector<idx_t>& side) {
  Grouping cliques;
  if (coarser > 0 && graph.vertices > kCoarsenAbove) cliques = group_by_clique(graph, kCliqueMembers);
  const bool shrinks = cliques.groups > 0 && cliques.groups * kShrinks <= graph.vertices;
  if (shrinks) {
    const Graph coarse = contract(graph, cliques);
    std::vector<idx_t> side_of_clique(static_cast<std::size_t>(coarse.vertices));
    auto separated = separate(coarse, coarser - 1, side_of_clique);
    if (!separated.ok()) return separated;
    for (Index v = 0; v < graph.vertices; ++v) {
      side[static_cast<std::size_t>(v)] = side_of_clique[static_cast<std::size_t>(cliques.group_of[v])];
    }
  }
  MetisGraph same(graph);
  Status done = shrinks ? refine(same, side) : separate_whole(same, side);
  if (!done.ok()) return done;
  return shrinks;
}

}  // namespace

Result<Separation> separate(const Graph& graph) {
  std::vector<idx_t> side(static_cast<std::size_t>(graph.vertices));
  auto by_cliques = separate(graph, kCoarser, side);
  if (!by_cliques.ok()) return by_cliques.status();
  return Separation{{side.begin(), side.end()}, *by_cliques};
}

}  // namespace stanchion
