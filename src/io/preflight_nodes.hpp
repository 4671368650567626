// What can be seen on dof maps and coordinates before anything is factored.
#pragma once

#include <string>

#include "io/dof_map.hpp"
#include "io/node_table.hpp"
#include "sparse/symmetric_matrix.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// "missing-partners": nodes without a dof that nearly all nodes have (right for supports whose equations
/// were struck out). Judged on the dofs ux uy uz and rx ry rz. Cost: one pass over the map.
Warnings inspect_partners(const DofMap& dofs, const std::string& dofs_path);

/// "nodes-without-place"; "far-coordinates": nodes further outside the box that holds the middle 96 % of all
/// nodes than ten times its size; "coincident-nodes": nodes at one place (to 1e-9 of that box) that share no
/// stiffness, the seam that was never merged. Rows of `matrix` and of `dofs` agree. Cost: sorting the nodes
/// and one pass over the entries.
Warnings inspect_nodes(const SymmetricMatrix& matrix, const DofMap& dofs, const NodeTable& nodes,
                       const std::string& nodes_path);

}  // namespace stanchion
