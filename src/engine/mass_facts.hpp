// What a mass matrix shows before anything is factored.
#pragma once

#include <vector>

#include "sparse/symmetric_matrix.hpp"

namespace stanchion {

/// Rows where M is entirely absent, when M is diagonal; nothing when M has off-diagonal entries.
struct MassFacts {
  bool diagonal = true;
  bool non_negative = true;  ///< of the diagonal
  std::vector<Index> massless;
};

/// Cost: one pass over the entries.
MassFacts inspect_mass(const SymmetricMatrix& mass);

}  // namespace stanchion
