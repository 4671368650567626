// Mass by direction, and its centre.
#pragma once

#include "io/dof_map.hpp"
#include "io/node_table.hpp"
#include "sparse/symmetric_matrix.hpp"
#include "stanchion/located.hpp"

namespace stanchion {

/// t^T M t for the three unit translations t (turned into nodal axes where there are some); the centre from
/// the direction with the most mass, when places are known. Struck equations are not in M, nor is their mass.
MassTotals mass_totals(const SymmetricMatrix& mass, const DofMap& dofs, const NodeTable* nodes,
                       const AxesTable* axes);

}  // namespace stanchion
