// The assembly tree: fronts in the order they are processed, with the rows of each.
#pragma once

#include <span>

#include "order/ordering.hpp"
#include "symbolic/supernodes.hpp"

namespace stanchion {

class ThreadPool;

/// Fronts numbered in processing order: a postorder whose children are sorted to keep the stack of
/// contribution blocks low (Liu, ACM TOMS 12 (1986)). Positions are equations in elimination order.
///
/// Example: two leaves 0 and 1 under root 2, each eliminating one equation: first_column = 0 1 2 3,
/// rows_below of 0 = {2}, of 1 = {2}, of 2 = {}; parent = 2 2 -1.
struct AssemblyTree {
  Index rows = 0;
  Index fronts = 0;
  Buffer<Index> position_of;  ///< equation -> elimination position
  Buffer<Index> equation_at;  ///< its inverse
  Buffer<Index>
      first_column;  ///< fronts + 1 positions: front f eliminates [first_column[f], first_column[f+1])
  Buffer<Offset> row_start;   ///< fronts + 1 offsets into rows_below
  Buffer<Index> rows_below;   ///< positions below the pivots, ascending
  Buffer<Index> parent;       ///< front, -1 for a root
  Buffer<Index> component;    ///< connected part of each front
  Buffer<Index> child_start;  ///< fronts + 1 places in `child`
  Buffer<Index> child;        ///< the children of every front, in processing order
  Index components = 0;

  Index pivots(Index front) const { return first_column[Offset{front} + 1] - first_column[front]; }
  Index below(Index front) const {
    return static_cast<Index>(row_start[Offset{front} + 1] - row_start[front]);
  }
  Index order(Index front) const { return pivots(front) + below(front); }
  std::span<const Index> children(Index front) const {
    return {child.data() + child_start[front], child.data() + child_start[Offset{front} + 1]};
  }
};

/// Lists the children of every front from their parents; build_assembly_tree has done so.
void link_children(AssemblyTree& tree);

/// Cost: linear in the row lists and the graph, plus sorting the lists. Where a pool is given its threads
/// list the rows; the tree is the same.
AssemblyTree build_assembly_tree(const Elimination& elimination, const SupernodeTree& supernodes,
                                 ThreadPool* pool = nullptr);

}  // namespace stanchion
