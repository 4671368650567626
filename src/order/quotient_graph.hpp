// The graph of groups of equations: three to six times fewer vertices than equations, so that ordering it is
// an order of magnitude cheaper. A poor grouping costs fill, never correctness.
#pragma once

#include <span>

#include "order/graph.hpp"
#include "sparse/symmetric_matrix.hpp"

namespace stanchion {

/// Group number of every equation, groups numbered from 0 in order of their first equation.
struct Grouping {
  Index groups = 0;
  Buffer<Index> group_of;
};

/// Rows listed group by group, ascending in each: start (groups + 1) and rows.
struct Members {
  Buffer<Offset> start;
  Buffer<Index> row;
};
Members members_of(const Grouping& grouping);

/// Equations with identical closed neighbourhoods (by 64-bit hash; a collision only costs fill) share a
/// group. Cost: one pass over the entries and a sort of the equations.
Grouping group_by_neighbourhood(const SymmetricMatrix& pattern);

/// Equations of one node share a group; `node_of` holds an arbitrary node number per equation, negative for
/// an equation that belongs to none and stays alone.
Grouping group_by_node(Index rows, std::span<const Index> node_of);

/// Joins every equation with a zero diagonal (a multiplier, say) to the group of a neighbour with a nonzero
/// diagonal, at most one per neighbour, so that a 2x2 pivot is at hand when they are eliminated together
/// (Duff and Pralet, SIAM J. Matrix Anal. Appl. 27 (2005)); those that find none left, two and two.
/// `zero_diagonal[i]` nonzero marks them. Returns the coarser grouping. Cost: one pass over the entries.
Grouping join_zero_diagonals(const SymmetricMatrix& pattern, Grouping grouping,
                             std::span<const char> zero_diagonal);

/// The graph whose vertices are groups, joined when any of their equations are coupled.
/// Cost: about a pass over the entries. Memory: 8 bytes per quotient edge.
Graph quotient_graph(const SymmetricMatrix& pattern, const Grouping& grouping);

}  // namespace stanchion
