// Constraints with multipliers of which some repeat others: forces among them that act on nothing.
#pragma once

#include <vector>

#include "diagnose/node_motions.hpp"
#include "diagnose/structure.hpp"

namespace stanchion {

/// A unit vector on multipliers with columns in proportion, with A_s v = 0 to `residual`.
struct RepeatedConstraint {
  std::vector<Index> rows;  ///< the positions of the group, ascending
  std::vector<double> entry;
  double residual = 0;  ///< ||A_s v||_inf
};

/// For every group of k such multipliers (or rows that look like some: no diagonal, but entries) k - 1
/// vectors, mutually orthogonal and orthogonal to `motions`; vectors of one group follow one another and name
/// the same rows. A group of many is taken in pieces; what holds between the pieces, and what follows from
/// three or more constraints that are not in proportion, is left to the iteration.
/// Cost: one pass over the entries and a sort of the constraints.
std::vector<RepeatedConstraint> find_repeated_constraints(const Structure& structure,
                                                          const ShiftedMatrix& matrix,
                                                          const std::vector<NodeMotion>& motions);

}  // namespace stanchion
