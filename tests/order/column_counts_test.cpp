#include "order/column_counts.hpp"

#include <gtest/gtest.h>

#include "order/brute_force.hpp"
#include "order/elimination_tree.hpp"

namespace stanchion {
namespace {

using test::Random;

/// An order that is a postorder of its own elimination tree, with that tree.
struct Ordered {
  Buffer<Index> vertex_at, position_of, parent;
};

Ordered postordered(const Graph& graph, const Buffer<Index>& vertex_at) {
  const Buffer<Index> post = postorder(elimination_tree(graph, vertex_at, test::inverse(vertex_at)));
  Ordered ordered{Buffer<Index>(post.size()), {}, {}};
  for (Offset k = 0; k < post.size(); ++k) ordered.vertex_at[k] = vertex_at[post[k]];
  ordered.position_of = test::inverse(ordered.vertex_at);
  ordered.parent = elimination_tree(graph, ordered.vertex_at, ordered.position_of);
  return ordered;
}

TEST(ColumnCounts, MatchSymbolicEliminationOnHundredsOfWeightedGraphs) {
  Random random(11);
  for (int round = 0; round < 500; ++round) {
    const auto n = static_cast<Index>(1 + round % 50);
    const test::BoolMatrix edges = test::random_edges(random, n, test::uniform(random, 0, 5.0 / n));
    const Graph graph = test::graph_of(random, edges, 1 + round % 7);
    const Ordered ordered = postordered(graph, test::random_permutation(random, n));
    const Buffer<Offset> count = column_counts(graph, ordered.vertex_at, ordered.position_of, ordered.parent);
    const auto below = test::eliminate_symbolically(edges, ordered.vertex_at);
    double flops = 0;
    for (Index k = 0; k < n; ++k) {
      const Index own = graph.weight[ordered.vertex_at[k]];
      Offset expected = own;
      for (const Index i : below[static_cast<std::size_t>(k)]) expected += graph.weight[ordered.vertex_at[i]];
      ASSERT_EQ(count[k], expected) << "round " << round << ", column " << k;
      for (Index c = 0; c < own; ++c) flops += static_cast<double>((expected - c) * (expected - c));
    }
    EXPECT_EQ(factor_flops(graph, ordered.vertex_at, count), flops);
  }
}

TEST(ColumnCounts, OfACliqueAChainAndIsolatedVertices) {
  Random random(12);
  test::BoolMatrix clique(6), chain(6);
  for (Index i = 0; i < 6; ++i) {
    for (Index j = 0; j < i; ++j) clique.join(i, j);
    if (i > 0) chain.join(i, i - 1);
  }
  Buffer<Index> natural(6);
  std::iota(natural.begin(), natural.end(), 0);
  const auto counts = [&](const test::BoolMatrix& edges) {
    const Graph graph = test::graph_of(random, edges, 1);
    const Buffer<Index> parent = elimination_tree(graph, natural, natural);
    const Buffer<Offset> count = column_counts(graph, natural, natural, parent);
    return std::vector<Offset>(count.begin(), count.end());
  };
  EXPECT_EQ(counts(clique), (std::vector<Offset>{6, 5, 4, 3, 2, 1}));
  EXPECT_EQ(counts(chain), (std::vector<Offset>{2, 2, 2, 2, 2, 1}));
  EXPECT_EQ(counts(test::BoolMatrix(6)), (std::vector<Offset>(6, 1)));
}

}  // namespace
}  // namespace stanchion
