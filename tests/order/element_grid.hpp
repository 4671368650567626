// Graphs of nodes as finite elements make them: every node of an element is coupled with all the others,
// every node of a bar with the one at its other end.
#pragma once

#include <algorithm>

#include "order/brute_force.hpp"
#include "order/components.hpp"
#include "order/permutation.hpp"
#include "order/quotient_graph.hpp"
#include "support/generators.hpp"

namespace stanchion::test {

/// nx by ny by nz nodes of brick elements (of four-noded shells where nz is 1): up to 8 or 26 neighbours
/// each. Node (x, y, z) is number[x + nx (y + ny z)].
inline Graph element_grid(Index nx, Index ny, Index nz, const Buffer<Index>& number) {
  const Index n = nx * ny * nz;
  const auto near = [](Index at, Index end) {
    return std::pair{std::max(at - 1, 0), std::min(at + 1, end - 1)};
  };
  std::vector<std::vector<Index>> neighbours(static_cast<std::size_t>(n));
  for (Index place = 0; place < n; ++place) {
    const Index mine = number[place];
    const auto [x0, x1] = near(place % nx, nx);
    const auto [y0, y1] = near(place / nx % ny, ny);
    const auto [z0, z1] = near(place / nx / ny, nz);
    for (Index z = z0; z <= z1; ++z) {
      for (Index y = y0; y <= y1; ++y) {
        for (Index x = x0; x <= x1; ++x) {
          const Index other = number[x + nx * (y + ny * z)];
          if (other != mine) neighbours[static_cast<std::size_t>(mine)].push_back(other);
        }
      }
    }
  }
  Graph graph{n, Buffer<Offset>(Offset{n} + 1, 0), {}, Buffer<Index>(n, 1)};
  for (Index v = 0; v < n; ++v) {
    auto& mine = neighbours[static_cast<std::size_t>(v)];
    std::sort(mine.begin(), mine.end());
    graph.start[Offset{v} + 1] = graph.start[v] + static_cast<Offset>(mine.size());
  }
  graph.adjacency = Buffer<Index>(graph.start[n]);
  for (Index v = 0; v < n; ++v) {
    const auto& mine = neighbours[static_cast<std::size_t>(v)];
    std::copy(mine.begin(), mine.end(), graph.adjacency.begin() + graph.start[v]);
  }
  return graph;
}

inline Graph element_grid(Index nx, Index ny, Index nz) {
  Buffer<Index> in_rows(nx * ny * nz);
  std::iota(in_rows.begin(), in_rows.end(), 0);
  return element_grid(nx, ny, nz, in_rows);
}

/// The same, its nodes numbered at random.
inline Graph element_grid(Random& random, Index nx, Index ny, Index nz) {
  return element_grid(nx, ny, nz, random_permutation(random, nx * ny * nz));
}

/// nx by ny by nz nodes, each joined by bars with the up to six beside it.
inline Graph bar_lattice(Index nx, Index ny, Index nz) {
  const SymmetricMatrix box = laplacian(nx, ny, nz);
  Grouping alone{box.rows, Buffer<Index>(box.rows)};
  std::iota(alone.group_of.begin(), alone.group_of.end(), 0);
  return quotient_graph(box, alone);
}

/// The same, its nodes numbered at random.
inline Graph bar_lattice(Random& random, Index nx, Index ny, Index nz) {
  const Graph in_rows = bar_lattice(nx, ny, nz);
  const Buffer<Index> number = random_permutation(random, in_rows.vertices);
  return subgraph(in_rows, number, inverse_of(number).begin(), in_rows.vertices);
}

}  // namespace stanchion::test
