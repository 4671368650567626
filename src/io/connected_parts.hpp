// Parts of a structure that share no stiffness.
#pragma once

#include <vector>

#include "io/dof_map.hpp"
#include "sparse/symmetric_matrix.hpp"

namespace stanchion {

struct ConnectedParts {
  Index count = 0;
  std::vector<Index> first_rows;   ///< of the first few parts, ascending
  std::vector<Index> sizes;        ///< rows of each of those
  std::vector<Index> part_of_row;  ///< number of every row's part, -1 for rows alone
};

/// Parts of the graph of non-zero entries, without the rows marked in `alone`. With a dof map of matching
/// size, the equations of one node belong together. Cost: almost linear in the entries, serial.
ConnectedParts find_parts(const SymmetricMatrix& matrix, const std::vector<char>& alone, const DofMap* dofs);

}  // namespace stanchion
