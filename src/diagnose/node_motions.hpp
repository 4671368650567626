// Motions of one node alone that nothing resists: empty rows, rotations without stiffness, collinear pins.
#pragma once

#include <vector>

#include "base/threads.hpp"
#include "diagnose/structure.hpp"

namespace stanchion {

/// Bound on ||A_s v||_inf of a null vector read off the matrix, rows of A_s being about 1: some hundred times
/// the rounding of an assembled entry.
inline constexpr double kLocalMotionLimit = 1e-12;

/// A unit vector on the rows of one node with A_s v = 0 to `kLocalMotionLimit`.
struct NodeMotion {
  Index node = 0;
  std::vector<double> entry;  ///< by the node's rows, in the order of Structure::rows_of_node
  bool empty_row = false;     ///< one dof, whose row is empty
};

/// All of them, mutually orthogonal. Cost: one pass over the entries and an eigenproblem of each node's own
/// block. Multipliers are left out: their diagonal is rightly zero.
std::vector<NodeMotion> find_node_motions(const Structure& structure, const ShiftedMatrix& matrix,
                                          ThreadPool& pool);

}  // namespace stanchion
