// From element matrices to one sparse symmetric matrix, without a list of triplets.
#pragma once

#include <array>
#include <functional>
#include <span>

#include "sparse/symmetric_matrix.hpp"
#include "specimen/dof_table.hpp"

namespace stanchion::specimen {

/// Which unknowns of one node meet which of another in an element: bit d of coupled[c] says that Dof c meets
/// Dof d. Symmetric. Pairs that are not coupled get no entry in the matrix.
using Coupling = std::array<DofSet, kDofKinds>;

/// Every pair of `dofs`.
Coupling full_coupling(DofSet dofs);

/// Elements of one kind. `fill(element, matrix)` writes the element matrix, row by row, of order
/// nodes_per_element times the number of unknowns in `dofs`, the nodes in order and within a node the
/// unknowns in the order of Dof. Unknowns that a node does not have are passed over.
struct ElementGroup {
  int nodes_per_element = 0;
  DofSet dofs = 0;
  Coupling coupling{};
  std::span<const Index> nodes;  ///< nodes_per_element numbers for each element
  std::function<void(Offset element, std::span<double> matrix)> fill;

  Offset elements() const { return static_cast<Offset>(nodes.size()) / nodes_per_element; }
};

/// The sum of all element matrices. `table` must be numbered. Two passes over the elements: the pattern,
/// block by block of nodes, then the values, added in the order of groups and elements (reproducible to the
/// bit). Memory: the matrix, plus a few numbers for each node and element. Throws std::bad_alloc.
SymmetricMatrix assemble(const DofTable& table, std::span<const ElementGroup> groups);

}  // namespace stanchion::specimen
