#include "symbolic/assembly_tree.hpp"

#include <gtest/gtest.h>

#include <set>

#include "order/brute_force.hpp"

namespace stanchion {
namespace {

using test::Random;

struct Built {
  SupernodeTree supernodes;
  AssemblyTree tree;
};

Built build(const SymmetricMatrix& matrix, std::span<const Index> nodes = {}) {
  auto elimination = order_equations({&matrix, nodes, true});
  EXPECT_TRUE(elimination.ok());
  Built built{build_supernodes(*elimination), {}};
  built.tree = build_assembly_tree(*elimination, built.supernodes);
  return built;
}

void expect_consistent(const AssemblyTree& tree) {
  ASSERT_TRUE(test::is_permutation_of_all(tree.position_of, tree.rows));
  for (Index i = 0; i < tree.rows; ++i) EXPECT_EQ(tree.equation_at[tree.position_of[i]], i);
  EXPECT_EQ(tree.first_column[0], 0);
  EXPECT_EQ(tree.first_column[tree.fronts], tree.rows);
  EXPECT_EQ(tree.rows_below.size(), tree.row_start[tree.fronts]);
  for (Index f = 0; f < tree.fronts; ++f) {
    EXPECT_GT(tree.pivots(f), 0);
    const Index* rows = tree.rows_below.data() + tree.row_start[f];
    Index least = tree.first_column[Offset{f} + 1];
    for (Index i = 0; i < tree.below(f); ++i) {
      ASSERT_GE(rows[i], least) << "front " << f << ": rows below ascend and lie behind the pivots";
      least = rows[i] + 1;
    }
    ASSERT_LE(least, tree.rows);
    const Index up = tree.parent[f];
    if (up < 0) {
      EXPECT_EQ(tree.below(f), 0);
      continue;
    }
    EXPECT_GT(up, f);
    EXPECT_EQ(tree.component[f], tree.component[up]);
    std::set<Index> front;
    for (Index k = tree.first_column[up]; k < tree.first_column[Offset{up} + 1]; ++k) front.insert(k);
    for (Offset k = tree.row_start[up]; k < tree.row_start[Offset{up} + 1]; ++k)
      front.insert(tree.rows_below[k]);
    for (Index i = 0; i < tree.below(f); ++i)
      EXPECT_TRUE(front.count(rows[i])) << "row missing from the parent";
  }
}

/// Every subtree is a run of fronts ending at its root.
void expect_postorder(const AssemblyTree& tree) {
  std::vector<Index> size(static_cast<std::size_t>(tree.fronts), 1),
      first(static_cast<std::size_t>(tree.fronts));
  for (Index f = 0; f < tree.fronts; ++f) {
    const auto i = static_cast<std::size_t>(f);
    if (size[i] == 1) first[i] = f;
    EXPECT_EQ(first[i], f - size[i] + 1);
    if (tree.parent[f] < 0) continue;
    const auto up = static_cast<std::size_t>(tree.parent[f]);
    if (size[up] == 1) first[up] = first[i];
    size[up] += size[i];
  }
}

/// The rows below a front are exactly those that brute-force elimination finds below any of its columns.
void expect_true_structure(const SymmetricMatrix& matrix, const Built& built, bool* without_zeros) {
  const AssemblyTree& tree = built.tree;
  const auto below = test::eliminate_symbolically(test::edges_of(matrix), tree.equation_at);
  Offset true_entries = 0, front_entries = 0;
  for (Index f = 0; f < tree.fronts; ++f) {
    const Index end = tree.first_column[Offset{f} + 1];
    std::set<Index> expected;
    for (Index k = tree.first_column[f]; k < end; ++k) {
      for (const Index i : below[static_cast<std::size_t>(k)]) {
        if (i >= end) expected.insert(i);
      }
      true_entries += 1 + static_cast<Offset>(below[static_cast<std::size_t>(k)].size());
      front_entries += tree.order(f) - (k - tree.first_column[f]);
    }
    const Index* rows = tree.rows_below.data() + tree.row_start[f];
    ASSERT_TRUE(std::equal(rows, rows + tree.below(f), expected.begin(), expected.end())) << "front " << f;
  }
  EXPECT_LE(true_entries, front_entries);
  *without_zeros = true_entries == front_entries;
}

TEST(AssemblyTree, HasTheTrueStructureOnRandomMatrices) {
  Random random(31);
  int exact = 0;
  for (int round = 0; round < 200; ++round) {
    const SymmetricMatrix matrix =
        test::random_sparse(random, 1 + round % 110, 1 + round % 4, round % 3 == 0 ? 0.3 : 0, 0);
    // Without zero diagonals or nodes the vertices are exact; then so is the union over a front's columns.
    const Built built = build(matrix);
    expect_consistent(built.tree);
    expect_postorder(built.tree);
    bool without_zeros = false;
    expect_true_structure(matrix, built, &without_zeros);
    exact += without_zeros;
  }
  EXPECT_GT(exact, 5) << "some of the matrices are to be left alone by amalgamation";
}

TEST(AssemblyTree, HasTheTrueStructureOfNodesWithSeveralEquations) {
  Random random(32);
  for (int round = 0; round < 40; ++round) {
    const SymmetricMatrix box = test::laplacian(2 + round % 4, 3, 2 + round % 3);
    std::vector<Index> node(static_cast<std::size_t>(box.rows));
    for (Index& v : node) v = static_cast<Index>(random() % (node.size() / 2));
    const Built built = build(box, node);
    expect_consistent(built.tree);
    bool without_zeros = false;
    expect_true_structure(box, built, &without_zeros);
  }
}

TEST(AssemblyTree, FrontsHaveTheSizesTheSupernodesPromised) {
  const SymmetricMatrix box = test::laplacian(11, 10, 9);
  const Built built = build(box);
  expect_consistent(built.tree);
  expect_postorder(built.tree);
  std::multiset<std::pair<Offset, Offset>> promised, found;
  for (std::size_t s = 0; s < built.supernodes.pivots.size(); ++s) {
    promised.insert({built.supernodes.front_rows[s], built.supernodes.pivots[s]});
  }
  for (Index f = 0; f < built.tree.fronts; ++f) found.insert({built.tree.order(f), built.tree.pivots(f)});
  EXPECT_EQ(found, promised);
}

TEST(AssemblyTree, TheTwoLeavesOfTheHeader) {
  // Two dense parts of 40 joined by one vertex: too large to be amalgamated.
  std::vector<Triplet> entries;
  for (Index i = 0; i < 81; ++i) {
    for (Index j = 0; j <= i; ++j) {
      if (i == 80 || i / 40 == j / 40) entries.push_back({i, j, i == j ? 100.0 : 1.0});
    }
  }
  const AssemblyTree tree = build(from_triplets(81, entries)).tree;
  ASSERT_GE(tree.fronts, 2);
  EXPECT_EQ(tree.parent[tree.fronts - 1], -1);
  Offset rows = 0;
  for (Index f = 0; f < tree.fronts; ++f) rows += tree.below(f);
  EXPECT_EQ(rows, tree.fronts - 1) << "only the joining vertex lies below the parts";
}

}  // namespace
}  // namespace stanchion
