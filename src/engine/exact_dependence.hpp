// Sparse vectors that follow from others exactly, which no factorization in floating point can show.
#pragma once

#include <vector>

#include "diagnose/dependent_columns.hpp"

namespace stanchion {

/// Marks vectors that are a linear combination of unmarked ones, as the numbers stand: a combination is
/// proposed by elimination, and counts only if it vanishes without any rounding. So the rank of the unmarked
/// is that of all. Coefficients that no double holds (thirds, say) leave a vector unmarked; so do products
/// near the limits of doubles. Cost: see dependent_columns, at most `most_steps`.
std::vector<char> exactly_dependent(const std::vector<SparseColumn>& vectors, Index rows, Offset most_steps);

/// Whether sum of coefficient times vector, over `combination`, is zero exactly; false where that cannot be
/// told. By error-free products and growing expansions (Shewchuk, Discrete Comput. Geom. 18 (1997)).
bool vanishes_exactly(const std::vector<SparseColumn>& vectors, const SparseColumn& combination);

}  // namespace stanchion
