// What is known of a specimen beforehand, and why.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "stanchion/request.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// Numbers of eigenvalues of K by sign, in exact arithmetic of the element formulas.
struct ExpectedInertia {
  Index negative = 0, zero = 0, positive = 0;
  std::string why;
};

/// A count in the meaning of `stanchion count`: eigenvalues of K or of K - s M strictly below `shift`, or
/// critical factors of K + f G between 0 and `shift`.
struct ExpectedCount {
  Pencil pencil = Pencil::kStiffness;
  double shift = 0;
  Index below = 0;
  std::string why;
};

/// The lowest values of a pencil, from a closed form of the continuum: the mesh meets them within
/// `tolerance`.
struct ExpectedValue {
  Pencil pencil = Pencil::kGeometric;
  double value = 0;
  Index multiplicity = 1;
  double tolerance = 0;  ///< relative, of this mesh
  std::string why;
};

/// With multipliers: the structure on its constraints.
struct ExpectedConstrained {
  Index multipliers = 0, rank = 0, redundant = 0;
  Index negative = 0, zero = 0, positive = 0;
};

struct Expected {
  ExpectedInertia inertia;
  std::optional<ExpectedConstrained> constrained;
  std::vector<ExpectedCount> counts;
  std::vector<ExpectedValue> values;
};

}  // namespace stanchion
