#include "order/dissection.hpp"

#include <dlfcn.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cstdlib>
#include <thread>
#include <vector>

#include "order/column_counts.hpp"
#include "order/components.hpp"
#include "order/element_grid.hpp"
#include "order/metis_graph.hpp"

namespace stanchion {
namespace {

std::vector<Index> as_vector(const Buffer<Index>& order) {
  return {order.begin(), order.end()};
}

TEST(ThreadRandom, GivesTheNumbersOfTheCLibrary) {
  // This program's rand() is ours; the next one in the search order is the C library's.
  const auto seed = reinterpret_cast<void (*)(unsigned)>(dlsym(RTLD_NEXT, "srand"));
  const auto draw = reinterpret_cast<int (*)()>(dlsym(RTLD_NEXT, "rand"));
  ASSERT_NE(seed, nullptr);
  ASSERT_NE(draw, nullptr);
  for (const unsigned start : {1U, 42U, 4'000'000'000U}) {
    seed(start);
    std::srand(start);
    for (int k = 0; k < 1000; ++k) ASSERT_EQ(std::rand(), draw()) << "seed " << start << ", number " << k;
  }
}

TEST(ThreadRandom, HasAStateOfItsOwnInEachThread) {
  ASSERT_TRUE(generator_is_per_thread());
  std::srand(5);
  const int first = std::rand(), second = std::rand();
  std::srand(5);
  EXPECT_EQ(std::rand(), first);
  std::thread([] { std::srand(6); }).join();
  EXPECT_EQ(std::rand(), second);
}

TEST(Dissection, IsTheSameForAnyNumberOfThreads) {
  std::vector<Graph> graphs;
  graphs.push_back(test::bar_lattice(160, 140, 1));
  graphs.push_back(test::bar_lattice(160, 11, 12));
  graphs.push_back(test::element_grid(160, 140, 1));
  graphs.push_back(test::element_grid(160, 11, 12));
  for (const Graph& graph : graphs) {
    const auto alone = nested_dissection(graph, 1);
    ASSERT_TRUE(alone.ok());
    std::vector<Index> order = as_vector(*alone);
    for (const int threads : {2, 3, 7}) {
      const auto together = nested_dissection(graph, threads);
      ASSERT_TRUE(together.ok());
      EXPECT_EQ(as_vector(*together), order) << threads << " threads";
    }
    std::sort(order.begin(), order.end());
    for (Index v = 0; v < graph.vertices; ++v) ASSERT_EQ(order[static_cast<std::size_t>(v)], v);
  }
}

TEST(Dissection, OfLatticesOfBarsTakesFarFewerOperationsThanMetis) {
  test::Random random(34);
  double ours = 0, of_metis = 0;
  for (int round = 0; round < 5; ++round) {
    const Graph lattice = test::bar_lattice(random, 20, 19, 18);
    const auto found = nested_dissection(lattice, 1);
    ASSERT_TRUE(found.ok());
    ours += predicted_flops(lattice, *found);
    MetisGraph same(lattice);
    std::vector<idx_t> order(static_cast<std::size_t>(lattice.vertices)), inverse(order.size());
    ASSERT_EQ(METIS_NodeND(&same.vertices, same.start.data(), same.adjacency.data(), same.weight.data(),
                           same.options.data(), order.data(), inverse.data()),
              METIS_OK);
    Buffer<Index> vertex_at(lattice.vertices);
    std::copy(order.begin(), order.end(), vertex_at.begin());
    of_metis += predicted_flops(lattice, vertex_at);
  }
  EXPECT_LT(ours, 0.75 * of_metis);
}

TEST(Dissection, LeavesWholeWhatHasNoSeparator) {
  // Everything is joined with everything: no vertex separator leaves two sides.
  constexpr Index kVertices = 3'100;
  Graph graph{kVertices, Buffer<Offset>(kVertices + 1), Buffer<Index>(Offset{kVertices} * (kVertices - 1)),
              Buffer<Index>(kVertices, 1)};
  Offset used = 0;
  for (Index v = 0; v < kVertices; ++v) {
    graph.start[v] = used;
    for (Index w = 0; w < kVertices; ++w) {
      if (w != v) graph.adjacency[used++] = w;
    }
  }
  graph.start[kVertices] = used;
  const auto order = nested_dissection(graph, 2);
  ASSERT_TRUE(order.ok());
  std::vector<Index> sorted = as_vector(*order);
  std::sort(sorted.begin(), sorted.end());
  for (Index v = 0; v < kVertices; ++v) ASSERT_EQ(sorted[static_cast<std::size_t>(v)], v);
}

TEST(Subgraph, LeavesOutEdgesToOutside) {
  const Graph line = test::bar_lattice(5, 1, 1);
  Buffer<Index> local(5, -1);
  const std::vector<Index> chosen{0, 1, 3};
  for (Index k = 0; k < 3; ++k) local[chosen[static_cast<std::size_t>(k)]] = k;
  const Graph part = subgraph(line, local, chosen.data(), 3);
  EXPECT_EQ(std::vector<Offset>(part.start.begin(), part.start.end()), (std::vector<Offset>{0, 1, 2, 2}));
  EXPECT_EQ(std::vector<Index>(part.adjacency.begin(), part.adjacency.end()), (std::vector<Index>{1, 0}));
}

}  // namespace
}  // namespace stanchion
