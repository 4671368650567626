// Null vectors of a few rows each, read off the matrix: they are kept out of every iteration.
#pragma once

#include <vector>

#include "base/threads.hpp"
#include "diagnose/columns.hpp"
#include "diagnose/node_motions.hpp"
#include "diagnose/repeated_constraints.hpp"

namespace stanchion {

/// Mutually orthogonal.
struct LocalMotions {
  std::vector<NodeMotion> of_nodes;
  std::vector<RepeatedConstraint> of_constraints;

  Index count() const { return static_cast<Index>(of_nodes.size() + of_constraints.size()); }
};

LocalMotions find_local_motions(const Structure& structure, const ShiftedMatrix& matrix, ThreadPool& pool);

/// x := x less its parts along the motions.
void remove(const LocalMotions& motions, const Structure& structure, Columns& x);

}  // namespace stanchion
