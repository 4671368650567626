#include "symbolic/supernodes.hpp"

#include <gtest/gtest.h>

#include "order/brute_force.hpp"

namespace stanchion {
namespace {

using test::Random;

Elimination eliminate(const SymmetricMatrix& matrix) {
  auto elimination = order_equations({&matrix, {}, true});
  EXPECT_TRUE(elimination.ok());
  return std::move(*elimination);
}

void expect_sound(const Elimination& elimination, const SupernodeTree& tree) {
  const Index vertices = elimination.graph.vertices;
  const auto count = static_cast<std::size_t>(tree.supernodes);
  ASSERT_TRUE(test::is_permutation_of_all(tree.vertex_at, vertices));
  ASSERT_EQ(tree.parent.size(), count);
  ASSERT_EQ(tree.positions.size(), count);
  ASSERT_EQ(tree.pivots.size(), count);
  ASSERT_EQ(tree.front_rows.size(), count);
  std::vector<int> covered(static_cast<std::size_t>(vertices), 0);
  for (std::size_t s = 0; s < count; ++s) {
    EXPECT_TRUE(tree.parent[s] == -1 || tree.parent[s] > static_cast<Index>(s));
    EXPECT_TRUE(std::is_sorted(tree.positions[s].begin(), tree.positions[s].end()));
    Offset weight = 0;
    for (const Index k : tree.positions[s]) {
      ++covered[static_cast<std::size_t>(k)];
      weight += elimination.graph.weight[tree.vertex_at[k]];
    }
    EXPECT_EQ(tree.pivots[s], weight);
    EXPECT_GT(tree.pivots[s], 0);
    EXPECT_GE(tree.front_rows[s], tree.pivots[s]);
    EXPECT_EQ(tree.parent[s] < 0, tree.front_rows[s] == tree.pivots[s]) << "nothing lies below a root";
  }
  for (const int times : covered) EXPECT_EQ(times, 1);
}

TEST(Supernodes, CoverEveryVertexOnceOnRandomMatrices) {
  Random random(21);
  for (int round = 0; round < 150; ++round) {
    const SymmetricMatrix matrix = test::random_sparse(random, round, 1 + round % 5, (round % 4) * 0.25, 0);
    const Elimination elimination = eliminate(matrix);
    expect_sound(elimination, build_supernodes(elimination));
  }
}

TEST(Supernodes, TheVertexOrderStaysAPostorderOfTheSameElimination) {
  Random random(22);
  for (int round = 1; round < 60; ++round) {
    const SymmetricMatrix matrix = test::random_sparse(random, round, 3, 0, 0);
    const Elimination elimination = eliminate(matrix);
    const SupernodeTree tree = build_supernodes(elimination);
    // Equivalent orders have the same fill: compare entries of L, vertex by vertex.
    test::BoolMatrix edges(elimination.graph.vertices);
    for (Index v = 0; v < edges.size(); ++v) {
      for (Offset e = elimination.graph.start[v]; e < elimination.graph.start[Offset{v} + 1]; ++e) {
        edges.join(v, elimination.graph.adjacency[e]);
      }
    }
    const auto before = test::eliminate_symbolically(edges, elimination.vertex_at);
    const auto after = test::eliminate_symbolically(edges, tree.vertex_at);
    const Buffer<Index> old_position = test::inverse(elimination.vertex_at);
    for (Index k = 0; k < edges.size(); ++k) {
      EXPECT_EQ(after[static_cast<std::size_t>(k)].size(),
                before[static_cast<std::size_t>(old_position[tree.vertex_at[k]])].size());
    }
  }
}

TEST(Supernodes, ADenseMatrixIsOne) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < 60; ++i) {
    for (Index j = 0; j <= i; ++j) entries.push_back({i, j, i == j ? 100.0 : 1.0});
  }
  const SymmetricMatrix matrix = from_triplets(60, entries);
  const SupernodeTree tree = build_supernodes(eliminate(matrix));
  EXPECT_EQ(tree.supernodes, 1);
  EXPECT_EQ(tree.factor_entries, 60 * 61 / 2);
}

TEST(Supernodes, AmalgamationLeavesFewTinyFrontsOnAChain) {
  const SymmetricMatrix chain = test::laplacian(5000, 1, 1);
  const SupernodeTree tree = build_supernodes(eliminate(chain));
  EXPECT_LT(tree.supernodes, 1500);
  EXPECT_EQ(tree.factor_entries, 2 * 5000 - 1) << "counted without relaxation zeros";
}

TEST(Supernodes, OfNothing) {
  EXPECT_EQ(build_supernodes(eliminate(from_triplets(0, {}))).supernodes, 0);
}

}  // namespace
}  // namespace stanchion
