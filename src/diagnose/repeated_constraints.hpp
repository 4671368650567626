// Constraints with multipliers of which some repeat others: forces among them that act on nothing.
#pragma once

#include <vector>

#include "diagnose/node_motions.hpp"
#include "diagnose/structure.hpp"

namespace stanchion {

/// A unit vector on multipliers with A_s v = 0 to `residual`.
struct RepeatedConstraint {
  std::vector<Index> rows;  ///< the positions of the group, ascending
  std::vector<double> entry;
  double residual = 0;        ///< ||A_s v||_inf
  bool in_proportion = true;  ///< false: it follows from several others together
};

/// Vectors on multipliers (or rows that look like some: no diagonal, but entries), mutually orthogonal and
/// orthogonal to `motions`: k - 1 for every group of k in proportion, then those of constraints that follow
/// from several others. What would take too many steps or too much memory is left to the iteration.
/// Cost: one pass over the entries, a sort of the constraints, an elimination of those that differ.
std::vector<RepeatedConstraint> find_repeated_constraints(const Structure& structure,
                                                          const ShiftedMatrix& matrix,
                                                          const std::vector<NodeMotion>& motions);

}  // namespace stanchion
