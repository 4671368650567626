// What can be seen on dof maps and coordinates before anything is factored.
#pragma once

#include <string>
#include <vector>

#include "io/dof_map.hpp"
#include "io/node_table.hpp"
#include "sparse/symmetric_matrix.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// "missing-partners": nodes without a dof that nearly all nodes have (right for supports whose equations
/// were struck out). Judged on the dofs ux uy uz and rx ry rz. Cost: one pass over the map.
Warnings inspect_partners(const DofMap& dofs, const std::string& dofs_path);

/// Whether a table of places cannot be meant for the model: all nodes have one z, as where the column was
/// left out, and more than half of them lie at the place of another one.
bool places_collapse(const DofMap& dofs, const NodeTable& nodes);

/// "nodes-without-place"; "far-coordinates": nodes further outside the box that holds the middle 96 % of all
/// nodes than ten times its size; "coincident-nodes": nodes at one place (to 1e-9 of that box) that share
/// neither stiffness nor a multiplier, the seam that was never merged. Rows of `matrix` and of `dofs` agree;
/// `multipliers` are equations among them. Cost: sorting the nodes and one pass over the entries.
Warnings inspect_nodes(const SymmetricMatrix& matrix, const DofMap& dofs,
                       const std::vector<Index>& multipliers, const NodeTable& nodes,
                       const std::string& nodes_path);

}  // namespace stanchion
