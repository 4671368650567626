// Distances said to hold no eigenvalue: how a second path that counts can look into them.
#pragma once

#include <span>
#include <vector>

#include "model/claims.hpp"

namespace stanchion {

/// What the second path says of `claimed.no_eigenvalue_within`: its own distance where it is as large, else
/// the counts at both ends of the interval (`low` and `high`, null when there are none): as many at both, no
/// eigenvalue between. Agreed when nothing is claimed.
ClaimComparison compare_radius(const ShiftCount& claimed, const ShiftCount& found, const ShiftCount* low,
                               const ShiftCount* high);

/// True when compare_radius needs the ends.
bool needs_ends(const ShiftCount& claimed, const ShiftCount& found);

}  // namespace stanchion
