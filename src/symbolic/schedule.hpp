// Which fronts run as whole subtrees on one worker, which are shared by all, and the memory both need.
#pragma once

#include <vector>

#include "symbolic/assembly_tree.hpp"

namespace stanchion {

/// A front below this many operations is not worth sharing among workers.
constexpr double kShareFlops = 2e7;

/// Half-open range of fronts: a subtree is contiguous in processing order, its root is the last.
struct Subtree {
  Index first = 0, end = 0;
  double flops = 0;
  Offset arena_doubles = 0;   ///< high-water mark of its stack of fronts and contribution blocks
  Offset result_doubles = 0;  ///< the root's contribution block, kept until its parent is assembled
};

/// Subtrees that run side by side, then shared fronts that take their results in: half-open ranges of both
/// lists.
struct Wave {
  std::size_t first_subtree = 0, end_subtree = 0;
  std::size_t first_shared = 0, end_shared = 0;
};

struct Schedule {
  int workers = 1;
  std::vector<Subtree> subtrees;     ///< in processing order
  std::vector<Index> shared_fronts;  ///< the rest, in processing order, each worked on by all
  std::vector<Wave> waves;           ///< in the order they run; one wave balances best, many need less memory
  bool keep_stacks = false;  ///< workers keep their memory from wave to wave: it need not be cleared again
  Offset worker_arena_doubles = 0;  ///< largest of the subtrees
  Offset shared_arena_doubles = 0;  ///< stack of the shared fronts
  Offset panel_doubles = 0;         ///< scratch of the largest front
  Offset peak_doubles = 0;          ///< bound on everything alive at once
};

/// Subtrees small enough to balance over `workers`; one worker gets one subtree per root. All subtrees run
/// before the first shared front, unless waves in processing order, which keep few results waiting, save much
/// memory. The arithmetic of every front is the same wherever it runs. Cost: linear in the fronts.
Schedule make_schedule(const AssemblyTree& tree, int workers);

/// Bound on everything alive at once, in doubles, when `workers` run the schedule, at most those it was made
/// for: fewer stacks of subtrees.
Offset peak_doubles_of(const AssemblyTree& tree, const Schedule& schedule, int workers);

/// Operations of one front with `pivots` of `order` rows eliminated.
double front_flops(Index order, Index pivots);

}  // namespace stanchion
