// Linear constraints between unknowns, enforced by Lagrange multipliers.
#pragma once

#include <vector>

#include "specimen/model.hpp"

namespace stanchion::specimen {

/// One term coefficient * u of a constraint, u being `dof` of `node`.
struct ConstraintTerm {
  Index node = 0;
  Dof dof = Dof::kUx;
  double coefficient = 1;
};

/// A constraint: the sum of its terms is zero. Its multiplier is a node of its own at `place`.
struct Constraint {
  Point place;
  std::vector<ConstraintTerm> terms;
};

/// Adds the multipliers' nodes and the off-diagonal entries. Call after every other node has been added, so
/// that the multipliers are the last equations; `terms` name unknowns that exist.
void add_constraints(Model& model, const std::vector<Constraint>& constraints);

}  // namespace stanchion::specimen
