#include "order/separator.hpp"

#include <gtest/gtest.h>
#include <metis.h>

#include <algorithm>
#include <array>
#include <limits>
#include <set>

#include "order/clique_graph.hpp"
#include "order/components.hpp"
#include "order/element_grid.hpp"
#include "order/level_separator.hpp"

namespace stanchion {
namespace {

using test::element_grid;
using test::Random;

TEST(CliqueGroups, AreDisjointCliquesNoLargerThanAsked) {
  Random random(31);
  for (int round = 0; round < 40; ++round) {
    const test::BoolMatrix edges = test::random_edges(random, 3 + round, 0.1 + 0.02 * round);
    const Graph graph = test::graph_of(random, edges, 5);
    for (const Index most : {1, 2, 3, 8}) {
      const Grouping cliques = group_by_clique(graph, most);
      std::vector<Index> size(static_cast<std::size_t>(cliques.groups), 0);
      for (Index v = 0; v < graph.vertices; ++v) {
        ASSERT_TRUE(cliques.group_of[v] >= 0 && cliques.group_of[v] < cliques.groups);
        ASSERT_LE(++size[static_cast<std::size_t>(cliques.group_of[v])], most);
        for (Index w = 0; w < v; ++w) {
          ASSERT_TRUE(cliques.group_of[v] != cliques.group_of[w] || edges(v, w));
        }
      }
      for (const Index members : size) ASSERT_GE(members, 1);
    }
  }
}

TEST(CliqueGroups, OfElementsShrinkTheGraphAndOfBarsDoNot) {
  EXPECT_EQ(group_by_clique(element_grid(40, 40, 1), 8).groups, 400);
  EXPECT_EQ(group_by_clique(element_grid(12, 12, 12), 8).groups, 216);
  EXPECT_EQ(group_by_clique(element_grid(100, 1, 1), 8).groups, 50);
}

TEST(Contract, JoinsGroupsWhoseMembersAreJoinedAndSumsWeights) {
  Random random(32);
  for (int round = 0; round < 40; ++round) {
    const Graph graph = test::graph_of(random, test::random_edges(random, 3 + round, 0.15), 5);
    const Grouping groups = group_by_clique(graph, 1 + round % 4);
    test::BoolMatrix expected(groups.groups);
    std::vector<Index> weight(static_cast<std::size_t>(groups.groups), 0);
    for (Index v = 0; v < graph.vertices; ++v) {
      weight[static_cast<std::size_t>(groups.group_of[v])] += graph.weight[v];
      for (Offset e = graph.start[v]; e < graph.start[Offset{v} + 1]; ++e) {
        expected.join(groups.group_of[v], groups.group_of[graph.adjacency[e]]);
      }
    }
    const Graph coarse = contract(graph, groups);
    ASSERT_EQ(coarse.vertices, groups.groups);
    for (Index g = 0; g < groups.groups; ++g) {
      ASSERT_EQ(coarse.weight[g], weight[static_cast<std::size_t>(g)]);
      std::vector<Index> found(coarse.adjacency.begin() + coarse.start[g],
                               coarse.adjacency.begin() + coarse.start[Offset{g} + 1]);
      std::sort(found.begin(), found.end());
      std::vector<Index> wanted;
      for (Index h = 0; h < groups.groups; ++h) {
        if (h != g && expected(g, h)) wanted.push_back(h);
      }
      ASSERT_EQ(found, wanted);
    }
  }
}

/// Weights of both sides and of the separator; fails where an edge joins the sides.
std::array<double, 3> weights_of(const Graph& graph, const std::vector<int>& side) {
  std::array<double, 3> weights{};
  for (Index v = 0; v < graph.vertices; ++v) {
    const int mine = side[static_cast<std::size_t>(v)];
    weights[static_cast<std::size_t>(mine)] += graph.weight[v];
    for (Offset e = graph.start[v]; e < graph.start[Offset{v} + 1]; ++e) {
      const int other = side[static_cast<std::size_t>(graph.adjacency[e])];
      EXPECT_FALSE(mine + other == 1) << "an edge from side " << mine << " to " << other;
    }
  }
  return weights;
}

/// Weight of METIS's own separator, the mean of three seeds.
double weight_of_metis(const Graph& graph) {
  std::vector<idx_t> start(graph.start.begin(), graph.start.end());
  std::vector<idx_t> adjacency(graph.adjacency.begin(), graph.adjacency.end());
  std::vector<idx_t> weight(graph.weight.begin(), graph.weight.end()), side(weight.size());
  std::array<idx_t, METIS_NOPTIONS> options;
  METIS_SetDefaultOptions(options.data());
  double sum = 0;
  for (const int seed : {1, 2, 3}) {
    options[METIS_OPTION_SEED] = seed;
    idx_t vertices = graph.vertices, found = 0;
    EXPECT_EQ(METIS_ComputeVertexSeparator(&vertices, start.data(), adjacency.data(), weight.data(),
                                           options.data(), &found, side.data()),
              METIS_OK);
    sum += found;
  }
  return sum / 3;
}

TEST(Separate, PartsElementsAsWellAsMetisInEqualHalvesWhateverTheirNumbers) {
  Random random(33);
  double ratios = 0;
  int graphs = 0;
  for (const auto& [nx, ny, nz] : std::vector<std::array<Index, 3>>{
           {120, 110, 1}, {400, 30, 1}, {90, 85, 1}, {20, 19, 18}, {40, 20, 10}, {60, 50, 3}}) {
    for (const bool shuffled : {false, true}) {
      const Graph graph = shuffled ? element_grid(random, nx, ny, nz) : element_grid(nx, ny, nz);
      const auto found = separate(graph);
      ASSERT_TRUE(found.ok());
      EXPECT_TRUE(found->by_cliques || (shuffled && nz == 1));
      const auto [left, right, between] = weights_of(graph, found->side);
      EXPECT_LT(std::max(left, right), 0.66 * graph.vertices);  // at most 1.3 of the mean
      EXPECT_GT(between, 0);
      ratios += between / weight_of_metis(graph);
      ++graphs;
    }
  }
  EXPECT_LT(ratios / graphs, 1.05);
}

TEST(Separate, LeavesFlatLatticesOfBarsToMetis) {
  const Graph bars = test::bar_lattice(50, 45, 1);
  const auto found = separate(bars);
  ASSERT_TRUE(found.ok());
  EXPECT_FALSE(found->by_cliques);
  EXPECT_EQ(found->level_cost, 0);
  const auto [left, right, between] = weights_of(bars, found->side);
  EXPECT_LT(std::max(left, right), 0.66 * bars.vertices);
  EXPECT_LT(between, 60);
}

std::vector<int> as_sides(const std::vector<idx_t>& side) {
  return {side.begin(), side.end()};
}

/// Whether all nodes of the separator of an n by n by n lattice lie on one sloping plane +-x +-y +-z = c.
bool is_sloping_plane(const std::vector<idx_t>& side, Index n) {
  for (int turned = 0; turned < 4; ++turned) {
    std::set<Index> sums;
    for (Index v = 0; v < n * n * n; ++v) {
      const Index x = v % n, y = v / n % n, z = v / n / n;
      if (side[static_cast<std::size_t>(v)] != kSeparator) continue;
      sums.insert((turned & 1 ? n - 1 - x : x) + (turned & 2 ? n - 1 - y : y) + z);
    }
    if (sums.size() == 1) return true;
  }
  return false;
}

TEST(LevelSeparator, OfACubeOfBarsIsASlopingPlane) {
  constexpr Index kNodes = 21;
  const std::vector<idx_t> side = level_separator(test::bar_lattice(kNodes, kNodes, kNodes));
  ASSERT_FALSE(side.empty());
  EXPECT_TRUE(is_sloping_plane(side, kNodes));
  const auto [left, right, between] = weights_of(test::bar_lattice(kNodes, kNodes, kNodes), as_sides(side));
  EXPECT_LE(between, (3 * kNodes * kNodes + 1) / 4);  // nodes of the hexagon through the middle
  EXPECT_GE(std::min(left, right), 0.3 * kNodes * kNodes * kNodes);
}

TEST(LevelSeparator, PartsRandomGraphsOrSaysThatItCannot) {
  Random random(36);
  int parted = 0, in_pieces = 0;
  for (int round = 0; round < 200; ++round) {
    test::BoolMatrix edges(3 + round % 50);
    for (Index v = 1; v < edges.size(); ++v) {  // a band, broken now and then
      const auto before = [&] { return v - 1 - static_cast<Index>(random() % std::min<std::size_t>(v, 4)); };
      if (random() % 80 != 0) edges.join(v, before());
      if (random() % 2 != 0) edges.join(v, before());
    }
    const Graph graph = test::graph_of(random, edges, 5);
    const std::vector<idx_t> side = level_separator(graph);
    if (connected_components(graph).count > 1) {
      ++in_pieces;
      EXPECT_TRUE(side.empty());
    }
    if (side.empty()) continue;
    ++parted;
    const auto [left, right, between] = weights_of(graph, as_sides(side));
    const double whole = left + right + between;
    EXPECT_GE(std::min(left, right), 0.3 * whole);
    EXPECT_NEAR(separator_cost(graph, side), between / (left / whole * (right / whole)), 1e-9 * whole);
  }
  EXPECT_GT(parted, 50);
  EXPECT_GT(in_pieces, 10);
  EXPECT_TRUE(level_separator(Graph{}).empty());
  EXPECT_EQ(separator_cost(Graph{}, {}), std::numeric_limits<double>::infinity());
}

TEST(Separate, TakesALevelOfALatticeWhereItIsBetterThanMetissSeparator) {
  Random random(35);
  double ratios = 0;
  int levels = 0;
  for (int round = 0; round < 6; ++round) {
    const Graph bars = test::bar_lattice(random, 20, 19, 18);
    const auto found = separate(bars);
    ASSERT_TRUE(found.ok());
    EXPECT_FALSE(found->by_cliques);
    const auto [left, right, between] = weights_of(bars, found->side);
    EXPECT_LT(std::max(left, right), 0.7 * bars.vertices);
    const double cost = separator_cost(bars, {found->side.begin(), found->side.end()});
    EXPECT_LE(cost, separator_cost(bars, level_separator(bars)));
    if (found->level_cost == 0) continue;
    ++levels;
    ratios += between / weight_of_metis(bars);
    // A level as good as this one is taken without METIS, a worse one is set against it.
    const auto alone = separate(bars, found->level_cost), asked = separate(bars, 0.8 * found->level_cost);
    ASSERT_TRUE(alone.ok() && asked.ok());
    EXPECT_EQ(alone->side, found->side);
    EXPECT_EQ(asked->side, found->side);
  }
  EXPECT_GE(levels, 3);
  EXPECT_LT(ratios / levels, 0.9);
  // METIS is better on a flat lattice; it is not heard where a level does as well as was asked.
  const Graph flat = test::bar_lattice(50, 45, 1);
  const auto level = separate(flat, 1e3);
  ASSERT_TRUE(level.ok());
  EXPECT_GT(level->level_cost, 0);
}

TEST(Separate, HeedsWeights) {
  Graph graph = element_grid(80, 60, 1);
  for (Index v = 0; v < graph.vertices; ++v) graph.weight[v] = v % 80 < 20 ? 9 : 1;  // the left quarter
  const auto found = separate(graph);
  ASSERT_TRUE(found.ok());
  const auto [left, right, between] = weights_of(graph, found->side);
  EXPECT_LT(std::max(left, right), 0.66 * (left + right + between));
}

TEST(Separate, IsTheSameEveryTime) {
  const Graph graph = element_grid(70, 50, 2);
  const auto first = separate(graph), second = separate(graph);
  ASSERT_TRUE(first.ok() && second.ok());
  EXPECT_EQ(first->side, second->side);
}

}  // namespace
}  // namespace stanchion
