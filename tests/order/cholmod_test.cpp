// The elimination tree and the column counts of a model of practical size, against CHOLMOD's.
#include <gtest/gtest.h>
#include <suitesparse/cholmod.h>

#include "order/brute_force.hpp"
#include "order/column_counts.hpp"
#include "order/elimination_tree.hpp"
#include "order/minimum_degree.hpp"
#include "order/quotient_graph.hpp"
#include "specimen/specimen.hpp"

namespace stanchion {
namespace {

using Long = SuiteSparse_long;

/// CHOLMOD's workspace, ended with the scope.
struct Common {
  Common() { cholmod_l_start(&data); }
  ~Common() { cholmod_l_finish(&data); }
  cholmod_common data;
};

/// The graph in elimination order as a CHOLMOD pattern, upper or lower triangle.
cholmod_sparse* triangle(const Graph& graph, const Buffer<Index>& vertex_at, const Buffer<Index>& position_of,
                         bool upper, Common& common) {
  const auto n = static_cast<std::size_t>(graph.vertices);
  cholmod_sparse* a =
      cholmod_l_allocate_sparse(n, n, n + static_cast<std::size_t>(graph.adjacency.size()) / 2, 0, 1,
                                upper ? 1 : -1, CHOLMOD_PATTERN, &common.data);
  auto* start = static_cast<Long*>(a->p);
  auto* row = static_cast<Long*>(a->i);
  Long used = 0;
  for (Index k = 0; k < graph.vertices; ++k) {
    start[k] = used;
    row[used++] = k;
    const Index v = vertex_at[k];
    for (Offset e = graph.start[v]; e < graph.start[Offset{v} + 1]; ++e) {
      const Index i = position_of[graph.adjacency[e]];
      if (upper ? i < k : i > k) row[used++] = i;
    }
  }
  start[n] = used;
  return a;
}

void compare_with_cholmod(const SymmetricMatrix& matrix) {
  const Graph graph = quotient_graph(matrix, group_by_neighbourhood(matrix));
  const auto order = minimum_degree(graph);
  ASSERT_TRUE(order.ok());
  // Postordered, as column_counts asks.
  const Buffer<Index> post = postorder(elimination_tree(graph, *order, test::inverse(*order)));
  Buffer<Index> vertex_at(post.size());
  for (Offset k = 0; k < post.size(); ++k) vertex_at[k] = (*order)[post[k]];
  const Buffer<Index> position_of = test::inverse(vertex_at);
  const Buffer<Index> parent = elimination_tree(graph, vertex_at, position_of);
  Graph unit{graph.vertices, graph.start.clone(), graph.adjacency.clone(), Buffer<Index>(graph.vertices, 1)};
  const Buffer<Offset> count = column_counts(unit, vertex_at, position_of, parent);

  Common common;
  const auto n = static_cast<std::size_t>(graph.vertices);
  std::vector<Long> their_parent(n), their_post(n), row_count(n), column_count(n), first(n), level(n);
  cholmod_sparse* upper = triangle(graph, vertex_at, position_of, true, common);
  cholmod_sparse* lower = triangle(graph, vertex_at, position_of, false, common);
  EXPECT_TRUE(cholmod_l_etree(upper, their_parent.data(), &common.data));
  EXPECT_EQ(cholmod_l_postorder(their_parent.data(), n, nullptr, their_post.data(), &common.data),
            static_cast<Long>(n));
  EXPECT_TRUE(cholmod_l_rowcolcounts(lower, nullptr, 0, their_parent.data(), their_post.data(),
                                     row_count.data(), column_count.data(), first.data(), level.data(),
                                     &common.data));
  for (Index k = 0; k < graph.vertices; ++k) {
    const auto kk = static_cast<std::size_t>(k);
    ASSERT_EQ(parent[k], their_parent[kk]) << "parent of " << k;
    ASSERT_EQ(count[k], column_count[kk]) << "column " << k;
  }
  cholmod_l_free_sparse(&upper, &common.data);
  cholmod_l_free_sparse(&lower, &common.data);
}

TEST(AgainstCholmod, TreeAndCountsOfAPlateAndASolid) {
  for (const char* name : {"plate", "solid", "frame"}) {
    SCOPED_TRACE(name);
    const auto specimen = make_specimen(name, 20'000);
    ASSERT_TRUE(specimen.ok()) << specimen.status().to_string();
    compare_with_cholmod(specimen->stiffness);
  }
}

TEST(AgainstCholmod, TreeAndCountsOfARandomMatrix) {
  test::Random random(13);
  compare_with_cholmod(test::random_sparse(random, 3000, 4, 0.1, 0));
}

}  // namespace
}  // namespace stanchion
