#include "order/components.hpp"

#include <gtest/gtest.h>

#include "order/brute_force.hpp"

namespace stanchion {
namespace {

/// Labels spread along edges until nothing changes.
std::vector<Index> lowest_reachable(const test::BoolMatrix& edges) {
  std::vector<Index> label(static_cast<std::size_t>(edges.size()));
  std::iota(label.begin(), label.end(), 0);
  for (bool changed = true; changed;) {
    changed = false;
    for (Index i = 0; i < edges.size(); ++i) {
      for (Index j = 0; j < edges.size(); ++j) {
        auto& mine = label[static_cast<std::size_t>(i)];
        if (!edges(i, j) || mine <= label[static_cast<std::size_t>(j)]) continue;
        mine = label[static_cast<std::size_t>(j)];
        changed = true;
      }
    }
  }
  return label;
}

TEST(ConnectedComponents, MatchReachabilityAndAreNumberedByTheLowestVertex) {
  test::Random random(6);
  for (int round = 0; round < 80; ++round) {
    const Index n = round;
    const test::BoolMatrix edges = test::random_edges(random, n, 1.2 / std::max<Index>(1, n));
    const Components components = connected_components(test::graph_of(random, edges, 1));
    const std::vector<Index> label = lowest_reachable(edges);
    Index count = 0;
    std::vector<Index> number(static_cast<std::size_t>(n), -1);
    for (Index i = 0; i < n; ++i) {
      const Index lowest = label[static_cast<std::size_t>(i)];
      if (lowest == i) number[static_cast<std::size_t>(i)] = count++;
      EXPECT_EQ(components.component_of[i], number[static_cast<std::size_t>(lowest)]);
    }
    EXPECT_EQ(components.count, count);
  }
}

TEST(ConnectedComponents, ALongChainDoesNotRecurse) {
  const SymmetricMatrix chain = test::laplacian(300'000, 1, 1);
  Graph graph{
      chain.rows, Buffer<Offset>(Offset{chain.rows} + 1, 0), Buffer<Index>(2 * (Offset{chain.rows} - 1)), {}};
  Offset used = 0;
  for (Index v = 0; v < chain.rows; ++v) {
    if (v > 0) graph.adjacency[used++] = v - 1;
    if (v + 1 < chain.rows) graph.adjacency[used++] = v + 1;
    graph.start[Offset{v} + 1] = used;
  }
  EXPECT_EQ(connected_components(graph).count, 1);
}

TEST(Subgraph, KeepsEdgesAndWeightsOfOnePart) {
  test::Random random(7);
  // Two random parts, interleaved: even and odd vertices.
  const test::BoolMatrix even = test::random_edges(random, 20, 0.3),
                         odd = test::random_edges(random, 20, 0.3);
  test::BoolMatrix both(40);
  for (Index i = 0; i < 20; ++i) {
    for (Index j = 0; j < i; ++j) {
      if (even(i, j)) both.join(2 * i, 2 * j);
      if (odd(i, j)) both.join(2 * i + 1, 2 * j + 1);
    }
  }
  const Graph graph = test::graph_of(random, both, 5);
  Buffer<Index> local(40);
  std::vector<Index> vertices;
  for (Index v = 0; v < 40; ++v) local[v] = v / 2;
  for (Index v = 1; v < 40; v += 2) vertices.push_back(v);
  const Graph part = subgraph(graph, local, vertices.data(), 20);
  ASSERT_EQ(part.vertices, 20);
  for (Index i = 0; i < 20; ++i) {
    EXPECT_EQ(part.weight[i], graph.weight[2 * i + 1]);
    std::vector<char> neighbour(20, 0);
    for (Offset e = part.start[i]; e < part.start[Offset{i} + 1]; ++e)
      ++neighbour[static_cast<std::size_t>(part.adjacency[e])];
    for (Index j = 0; j < 20; ++j)
      EXPECT_EQ(neighbour[static_cast<std::size_t>(j)] == 1, i != j && odd(i, j));
  }
}

}  // namespace
}  // namespace stanchion
