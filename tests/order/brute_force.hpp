// Graphs and symbolic elimination done the slow, obvious way: what the fast code is held against.
#pragma once

#include <numeric>
#include <vector>

#include "order/graph.hpp"
#include "sparse/symmetric_matrix.hpp"
#include "support/generators.hpp"

namespace stanchion::test {

/// A full boolean matrix.
class BoolMatrix {
 public:
  explicit BoolMatrix(Index n) : n_(n), at_(static_cast<std::size_t>(n) * static_cast<std::size_t>(n), 0) {}
  Index size() const { return n_; }
  bool operator()(Index i, Index j) const { return at_[place(i, j)] != 0; }
  void join(Index i, Index j) { at_[place(i, j)] = at_[place(j, i)] = 1; }

 private:
  std::size_t place(Index i, Index j) const {
    return static_cast<std::size_t>(i) * static_cast<std::size_t>(n_) + static_cast<std::size_t>(j);
  }
  Index n_;
  std::vector<char> at_;
};

/// Random edges, each present with probability `density`.
inline BoolMatrix random_edges(Random& random, Index n, double density) {
  BoolMatrix edges(n);
  for (Index i = 0; i < n; ++i) {
    for (Index j = 0; j < i; ++j) {
      if (uniform(random, 0, 1) < density) edges.join(i, j);
    }
  }
  return edges;
}

/// The same edges as a Graph, with weights 1 to `heaviest`.
inline Graph graph_of(Random& random, const BoolMatrix& edges, Index heaviest) {
  const Index n = edges.size();
  std::vector<Index> adjacency;
  Graph graph{n, Buffer<Offset>(Offset{n} + 1, 0), {}, Buffer<Index>(n)};
  for (Index i = 0; i < n; ++i) {
    for (Index j = 0; j < n; ++j) {
      if (i != j && edges(i, j)) adjacency.push_back(j);
    }
    graph.start[Offset{i} + 1] = static_cast<Offset>(adjacency.size());
    graph.weight[i] = 1 + static_cast<Index>(random() % static_cast<std::uint64_t>(heaviest));
  }
  graph.adjacency = Buffer<Index>(static_cast<Offset>(adjacency.size()));
  std::copy(adjacency.begin(), adjacency.end(), graph.adjacency.begin());
  return graph;
}

inline BoolMatrix edges_of(const SymmetricMatrix& matrix) {
  BoolMatrix edges(matrix.rows);
  for (Index j = 0; j < matrix.rows; ++j) {
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      if (matrix.row[k] != j) edges.join(matrix.row[k], j);
    }
  }
  return edges;
}

inline Buffer<Index> random_permutation(Random& random, Index n) {
  Buffer<Index> order(n);
  std::iota(order.begin(), order.end(), 0);
  for (Index k = n; k > 1; --k)
    std::swap(order[k - 1], order[static_cast<Offset>(random() % static_cast<unsigned>(k))]);
  return order;
}

inline Buffer<Index> inverse(const Buffer<Index>& permutation) {
  Buffer<Index> result(permutation.size());
  for (Offset k = 0; k < permutation.size(); ++k) result[permutation[k]] = static_cast<Index>(k);
  return result;
}

inline bool is_permutation_of_all(const Buffer<Index>& order, Index n) {
  std::vector<char> seen(static_cast<std::size_t>(n), 0);
  if (order.size() != n) return false;
  for (const Index v : order) {
    if (v < 0 || v >= n || seen[static_cast<std::size_t>(v)]) return false;
    seen[static_cast<std::size_t>(v)] = 1;
  }
  return true;
}

/// Rows below the diagonal of every column of L, in elimination positions, by playing the elimination
/// through: the later neighbours of each eliminated vertex become a clique.
inline std::vector<std::vector<Index>> eliminate_symbolically(const BoolMatrix& edges,
                                                              const Buffer<Index>& vertex_at) {
  const Index n = edges.size();
  BoolMatrix filled(n);
  for (Index i = 0; i < n; ++i) {
    for (Index j = 0; j < i; ++j) {
      if (edges(vertex_at[i], vertex_at[j])) filled.join(i, j);
    }
  }
  std::vector<std::vector<Index>> below(static_cast<std::size_t>(n));
  for (Index k = 0; k < n; ++k) {
    auto& mine = below[static_cast<std::size_t>(k)];
    for (Index i = k + 1; i < n; ++i) {
      if (filled(i, k)) mine.push_back(i);
    }
    for (const Index i : mine) {
      for (const Index j : mine) {
        if (i > j) filled.join(i, j);
      }
    }
  }
  return below;
}

/// Parent of every column: its first row below the diagonal.
inline std::vector<Index> parents(const std::vector<std::vector<Index>>& below) {
  std::vector<Index> parent;
  for (const auto& rows : below) parent.push_back(rows.empty() ? -1 : rows.front());
  return parent;
}

}  // namespace stanchion::test
