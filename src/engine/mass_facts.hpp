// What a mass matrix shows before anything is factored.
#pragma once

#include <vector>

#include "sparse/symmetric_matrix.hpp"

namespace stanchion {

struct MassFacts {
  bool diagonal = true;
  bool non_negative = true;     ///< of the diagonal
  std::vector<Index> massless;  ///< rows without an entry, ascending
};

/// Cost: one pass over the entries.
MassFacts inspect_mass(const SymmetricMatrix& mass);

}  // namespace stanchion
