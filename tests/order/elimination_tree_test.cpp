#include "order/elimination_tree.hpp"

#include <gtest/gtest.h>

#include "order/brute_force.hpp"

namespace stanchion {
namespace {

using test::Random;

TEST(EliminationTree, MatchesSymbolicEliminationOnHundredsOfGraphs) {
  Random random(8);
  for (int round = 0; round < 400; ++round) {
    const auto n = static_cast<Index>(1 + round % 45);
    const test::BoolMatrix edges = test::random_edges(random, n, test::uniform(random, 0, 4.0 / n));
    const Buffer<Index> vertex_at = test::random_permutation(random, n);
    const Buffer<Index> parent =
        elimination_tree(test::graph_of(random, edges, 3), vertex_at, test::inverse(vertex_at));
    const auto expected = test::parents(test::eliminate_symbolically(edges, vertex_at));
    EXPECT_TRUE(std::equal(parent.begin(), parent.end(), expected.begin(), expected.end()))
        << "round " << round;
  }
}

TEST(EliminationTree, AnArrowIsAStarOrAChain) {
  Random random(9);
  test::BoolMatrix arrow(10);
  for (Index i = 0; i < 9; ++i) arrow.join(i, 9);
  Buffer<Index> forward(10), backward(10);
  for (Index k = 0; k < 10; ++k) {
    forward[k] = k;
    backward[k] = 9 - k;
  }
  const Graph graph = test::graph_of(random, arrow, 1);
  const Buffer<Index> star = elimination_tree(graph, forward, test::inverse(forward));
  const Buffer<Index> chain = elimination_tree(graph, backward, test::inverse(backward));
  for (Index k = 0; k < 9; ++k) {
    EXPECT_EQ(star[k], 9);
    EXPECT_EQ(chain[k], k + 1);
  }
  EXPECT_EQ(star[9], -1);
}

/// A random forest: every node's parent is a later node or none.
Buffer<Index> random_forest(Random& random, Index n) {
  Buffer<Index> parent(n);
  for (Index v = 0; v < n; ++v) {
    const bool root = v + 1 == n || random() % 9 == 0;
    parent[v] =
        root ? -1
             : v + 1 + static_cast<Index>(random() % static_cast<unsigned>(std::min<Index>(n - v - 1, 6)));
  }
  return parent;
}

TEST(Postorder, ChildrenComeBeforeParentsAndSubtreesStayTogether) {
  Random random(10);
  for (int round = 0; round < 200; ++round) {
    const auto n = static_cast<Index>(1 + round % 60);
    const Buffer<Index> parent = random_forest(random, n);
    const Buffer<Index> order = postorder(parent);
    ASSERT_TRUE(test::is_permutation_of_all(order, n));
    const Buffer<Index> rank = test::inverse(order);
    std::vector<Index> size(static_cast<std::size_t>(n), 1), first(static_cast<std::size_t>(n)),
        last_child(first);
    for (Index v = 0; v < n; ++v) first[static_cast<std::size_t>(v)] = rank[v];
    std::fill(last_child.begin(), last_child.end(), -1);
    for (const Index v : order) {
      if (parent[v] < 0) continue;
      const auto up = static_cast<std::size_t>(parent[v]), me = static_cast<std::size_t>(v);
      EXPECT_LT(rank[v], rank[parent[v]]);
      EXPECT_LT(last_child[up], v) << "children ascend";
      last_child[up] = v;
      size[up] += size[me];
      first[up] = std::min(first[up], first[me]);
    }
    for (Index v = 0; v < n; ++v) {
      const auto i = static_cast<std::size_t>(v);
      EXPECT_EQ(first[i], rank[v] - size[i] + 1) << "a subtree is a run of ranks that ends at its root";
    }
  }
}

TEST(Postorder, AChainOfAMillionDoesNotRecurse) {
  Buffer<Index> parent(1'000'000);
  for (Index v = 0; v < 1'000'000; ++v) parent[v] = v + 1 < 1'000'000 ? v + 1 : -1;
  const Buffer<Index> order = postorder(parent);
  EXPECT_EQ(order[0], 0);
  EXPECT_EQ(order[999'999], 999'999);
  EXPECT_TRUE(postorder(Buffer<Index>()).empty());
}

}  // namespace
}  // namespace stanchion
