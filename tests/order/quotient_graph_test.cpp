#include "order/quotient_graph.hpp"

#include <gtest/gtest.h>

#include <limits>
#include <set>

#include "order/brute_force.hpp"

namespace stanchion {
namespace {

using test::BoolMatrix;
using test::Random;

/// Groups must be numbered by their first equation.
void expect_numbered_by_first_appearance(const Grouping& grouping) {
  Index next = 0;
  for (const Index group : grouping.group_of) {
    ASSERT_LE(group, next);
    if (group == next) ++next;
  }
  EXPECT_EQ(grouping.groups, next);
}

/// A matrix of nodes with `dofs` alike equations each, on random edges.
SymmetricMatrix blocks(Random& random, Index nodes, Index dofs, double density) {
  const BoolMatrix edges = test::random_edges(random, nodes, density);
  std::vector<Triplet> entries;
  for (Index a = 0; a < nodes; ++a) {
    for (Index b = 0; b <= a; ++b) {
      if (a != b && !edges(a, b)) continue;
      for (Index i = 0; i < dofs; ++i) {
        for (Index j = 0; j < dofs; ++j) {
          if (a != b || i >= j) entries.push_back({a + nodes * i, b + nodes * j, 1});
        }
      }
    }
  }
  return from_triplets(nodes * dofs, entries);
}

TEST(GroupByNeighbourhood, GroupsExactlyTheEqualClosedNeighbourhoods) {
  Random random(1);
  for (int round = 0; round < 60; ++round) {
    const auto n = static_cast<Index>(1 + round);
    const SymmetricMatrix matrix =
        round % 2 ? test::random_sparse(random, n, 3, 0.3, 0) : blocks(random, n, 1 + n % 4, 3.0 / n);
    const BoolMatrix edges = test::edges_of(matrix);
    const Grouping grouping = group_by_neighbourhood(matrix);
    expect_numbered_by_first_appearance(grouping);
    for (Index i = 0; i < matrix.rows; ++i) {
      for (Index j = 0; j < i; ++j) {
        bool same = true;
        for (Index k = 0; k < matrix.rows; ++k)
          same = same && (edges(i, k) || i == k) == (edges(j, k) || j == k);
        EXPECT_EQ(grouping.group_of[i] == grouping.group_of[j], same) << i << " and " << j;
      }
    }
  }
}

TEST(GroupByNeighbourhood, BlocksOfANodeBecomeOneVertex) {
  Random random(2);
  const Grouping grouping = group_by_neighbourhood(blocks(random, 50, 6, 0.1));
  EXPECT_EQ(grouping.groups, 50);
  for (Index i = 0; i < 300; ++i) EXPECT_EQ(grouping.group_of[i], i % 50);
}

TEST(GroupByNode, SharesAGroupExactlyWithinANode) {
  Random random(3);
  for (int round = 0; round < 60; ++round) {
    const Index n = 1 + round * 3;
    // Numbers close together are looked up, others sorted; some are negative: no node. All, in some rounds.
    const Index spread = round % 3 == 0 ? 1000 : 1, lowest = round % 10 == 9 ? 12 : 2;
    std::vector<Index> node(static_cast<std::size_t>(n));
    for (Index& v : node) v = (static_cast<Index>(random() % 12) - lowest) * spread;
    if (round % 7 == 6) node.back() = std::numeric_limits<Index>::max();
    const Grouping grouping = group_by_node(n, node);
    expect_numbered_by_first_appearance(grouping);
    for (Index i = 0; i < n; ++i) {
      for (Index j = 0; j < i; ++j) {
        const Index a = node[static_cast<std::size_t>(i)], b = node[static_cast<std::size_t>(j)];
        EXPECT_EQ(grouping.group_of[i] == grouping.group_of[j], a >= 0 && a == b);
      }
    }
  }
}

TEST(JoinZeroDiagonals, PairsEachWithOneOwnNeighbourAndLeavesNoPairUnused) {
  Random random(4);
  for (int round = 0; round < 40; ++round) {
    const SymmetricMatrix matrix = test::random_sparse(random, 3 + round, 2.5, 0.4, 0);
    const Index n = matrix.rows;
    std::vector<char> zero(static_cast<std::size_t>(n));
    for (Index j = 0; j < n; ++j)
      zero[static_cast<std::size_t>(j)] = matrix.value[matrix.column_start[j]] == 0;
    std::vector<Index> alone(static_cast<std::size_t>(n));
    std::iota(alone.begin(), alone.end(), 0);
    const Grouping joined = join_zero_diagonals(matrix, group_by_node(n, alone), zero);
    expect_numbered_by_first_appearance(joined);
    const BoolMatrix edges = test::edges_of(matrix);
    std::vector<std::vector<Index>> members(static_cast<std::size_t>(joined.groups));
    for (Index i = 0; i < n; ++i) members[static_cast<std::size_t>(joined.group_of[i])].push_back(i);
    std::vector<char> paired(static_cast<std::size_t>(n), 0);
    for (const auto& group : members) {
      ASSERT_LE(group.size(), 2U);
      if (group.size() == 1) continue;
      EXPECT_TRUE(edges(group[0], group[1]));
      EXPECT_TRUE(zero[static_cast<std::size_t>(group[0])] || zero[static_cast<std::size_t>(group[1])]);
      for (const Index i : group) paired[static_cast<std::size_t>(i)] = 1;
    }
    for (Index i = 0; i < n; ++i) {
      for (Index j = 0; j < n; ++j) {
        const auto ii = static_cast<std::size_t>(i), jj = static_cast<std::size_t>(j);
        if (i == j || !edges(i, j) || !zero[ii]) continue;
        EXPECT_TRUE(paired[ii] || paired[jj])
            << "equations " << i << " and " << j << " could have been joined";
      }
    }
  }
}

TEST(JoinZeroDiagonals, PrefersAPartnerWithADiagonal) {
  // 0 and 1 have none; 0 is coupled to both others, and 2 is the only strong one.
  const SymmetricMatrix matrix = from_triplets(3, {{0, 0, 0}, {1, 0, 1}, {2, 0, 1}, {1, 1, 0}, {2, 2, 1}});
  const std::vector<Index> alone{0, 1, 2};
  const std::vector<char> zero{1, 1, 0};
  const Grouping joined = join_zero_diagonals(matrix, group_by_node(3, alone), zero);
  EXPECT_EQ(joined.groups, 2);
  EXPECT_EQ(joined.group_of[0], joined.group_of[2]);
}

TEST(JoinZeroDiagonals, PairsAChainWithoutAnyDiagonal) {
  std::vector<Triplet> entries;
  for (Index i = 0; i < 10; ++i) {
    entries.push_back({i, i, 0});
    if (i > 0) entries.push_back({i, i - 1, 1});
  }
  std::vector<Index> alone(10);
  std::iota(alone.begin(), alone.end(), 0);
  const std::vector<char> zero(10, 1);
  EXPECT_EQ(join_zero_diagonals(from_triplets(10, entries), group_by_node(10, alone), zero).groups, 5);
}

TEST(JoinZeroDiagonals, AnExplicitZeroEntryIsNoPartner) {
  const SymmetricMatrix matrix = from_triplets(2, {{0, 0, 1}, {1, 0, 0}, {1, 1, 0}});
  const std::vector<Index> alone{0, 1};
  const std::vector<char> zero{0, 1};
  EXPECT_EQ(join_zero_diagonals(matrix, group_by_node(2, alone), zero).groups, 2);
}

void expect_edges_of_the_groups(const SymmetricMatrix& matrix, const Grouping& grouping) {
  const BoolMatrix edges = test::edges_of(matrix);
  std::vector<std::set<Index>> expected(static_cast<std::size_t>(grouping.groups));
  std::vector<Index> weight(static_cast<std::size_t>(grouping.groups), 0);
  for (Index i = 0; i < matrix.rows; ++i) {
    const Index g = grouping.group_of[i];
    ++weight[static_cast<std::size_t>(g)];
    for (Index j = 0; j < matrix.rows; ++j) {
      const Index h = grouping.group_of[j];
      if (g != h && edges(i, j)) expected[static_cast<std::size_t>(g)].insert(h);
    }
  }
  const Graph graph = quotient_graph(matrix, grouping);
  ASSERT_EQ(graph.vertices, grouping.groups);
  ASSERT_EQ(graph.adjacency.size(), graph.start[graph.vertices]);
  for (Index g = 0; g < graph.vertices; ++g) {
    EXPECT_EQ(graph.weight[g], weight[static_cast<std::size_t>(g)]);
    std::vector<Index> found;
    for (Offset e = graph.start[g]; e < graph.start[Offset{g} + 1]; ++e) found.push_back(graph.adjacency[e]);
    std::sort(found.begin(), found.end());
    EXPECT_TRUE(std::equal(found.begin(), found.end(), expected[static_cast<std::size_t>(g)].begin(),
                           expected[static_cast<std::size_t>(g)].end()));
  }
}

TEST(QuotientGraph, HasTheEdgesOfTheGroupsOnceInBothDirections) {
  Random random(5);
  for (int round = 0; round < 60; ++round) {
    const SymmetricMatrix matrix = test::random_sparse(random, 2 + 2 * round, 3, 0.2, 0);
    std::vector<Index> node(static_cast<std::size_t>(matrix.rows));
    for (Index& v : node) v = static_cast<Index>(random() % (1 + node.size() / 2));
    expect_edges_of_the_groups(matrix, group_by_node(matrix.rows, node));
  }
}

/// Columns of one node mostly end alike; some lack an entry, or have one more.
TEST(QuotientGraph, OfNodesWhoseEquationsHaveAlmostTheSameNeighbours) {
  Random random(6);
  for (int round = 0; round < 60; ++round) {
    const Index nodes = 4 + round / 4, each = 1 + round % 4, rows = nodes * each;
    std::vector<Triplet> entries;
    for (Index i = 0; i < rows; ++i) entries.push_back({i, i, 1});
    for (Index a = 0; a < nodes; ++a) {
      for (Index b = 0; b <= a; ++b) {
        if (random() % 3 != 0) continue;
        for (Index i = a * each; i < (a + 1) * each; ++i) {
          for (Index j = b * each; j < (b + 1) * each; ++j) {
            if (i > j && random() % 2 != 0) entries.push_back({i, j, 1});
          }
        }
      }
    }
    const SymmetricMatrix matrix = from_triplets(rows, entries);
    std::vector<Index> node(static_cast<std::size_t>(rows));
    for (Index i = 0; i < rows; ++i) node[static_cast<std::size_t>(i)] = i / each;
    expect_edges_of_the_groups(matrix, group_by_node(rows, node));
    expect_edges_of_the_groups(matrix, group_by_neighbourhood(matrix));
  }
}

TEST(QuotientGraph, OfNothingIsNothing) {
  const SymmetricMatrix matrix = from_triplets(0, {});
  EXPECT_EQ(quotient_graph(matrix, group_by_neighbourhood(matrix)).vertices, 0);
}

}  // namespace
}  // namespace stanchion
