#include "specimen/constraint.hpp"

#include <array>
#include <memory>
#include <utility>

namespace stanchion::specimen {
namespace {

/// Multiplier and `dof` meet each other, nothing else does.
Coupling border(Dof dof) {
  Coupling coupling{};
  coupling[static_cast<std::size_t>(dof)] = kMultiplierOnly;
  coupling[static_cast<std::size_t>(Dof::kMultiplier)] = dof_bit(dof);
  return coupling;
}

/// Elements of two nodes, multiplier and body, each with the unknowns {dof, multiplier}.
Part border_part(Dof dof, std::vector<Index> nodes, std::vector<double> coefficients) {
  auto shared = std::make_shared<const std::vector<double>>(std::move(coefficients));
  Part part{2, static_cast<DofSet>(dof_bit(dof) | kMultiplierOnly), std::move(nodes), {}, {}, {}};
  part.stiffness = PartMatrix{border(dof), [shared](Offset e, std::span<double> out) {
                                // 4 x 4: row 1 is the multiplier's own unknown, column 2 the body's
                                out[1 * 4 + 2] = out[2 * 4 + 1] = (*shared)[static_cast<std::size_t>(e)];
                              }};
  return part;
}

}  // namespace

void add_constraints(Model& model, const std::vector<Constraint>& constraints) {
  std::array<std::vector<Index>, kDofKinds> nodes;
  std::array<std::vector<double>, kDofKinds> coefficients;
  for (const Constraint& constraint : constraints) {
    const Index multiplier = model.table.add_node(constraint.place, kMultiplierOnly);
    model.multiplier_nodes.push_back(multiplier);
    for (const ConstraintTerm& term : constraint.terms) {
      const auto kind = static_cast<std::size_t>(term.dof);
      nodes[kind].insert(nodes[kind].end(), {multiplier, term.node});
      coefficients[kind].push_back(term.coefficient);
    }
  }
  for (std::size_t kind = 0; kind < kDofKinds; ++kind) {
    if (nodes[kind].empty()) continue;
    model.parts.push_back(
        border_part(static_cast<Dof>(kind), std::move(nodes[kind]), std::move(coefficients[kind])));
  }
}

}  // namespace stanchion::specimen
