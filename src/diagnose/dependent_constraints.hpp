// Constraints that follow from several others together: forces among their multipliers that act on nothing.
#pragma once

#include <vector>

#include "diagnose/dependent_columns.hpp"
#include "diagnose/repeated_constraints.hpp"

namespace stanchion {

/// One constraint, or several in proportion taken as one.
struct DistinctConstraint {
  std::vector<Index> rows;     ///< its multipliers, ascending
  std::vector<double> weight;  ///< on them, of length 1
  SparseColumn column;         ///< what `weight` makes of their columns of A_s
};

/// Mutually orthogonal unit vectors that act on nothing to kLocalMotionLimit, each made of whole `weight`s;
/// `rows`: those of A_s. Vectors of constraints that are linked stand together.
std::vector<RepeatedConstraint> find_dependent_constraints(std::vector<DistinctConstraint> constraints,
                                                           Index rows);

/// Memory that they take at most beside the matrix, for so many zero directions.
Offset dependent_constraint_bytes(Index rows, Index zero);

}  // namespace stanchion
