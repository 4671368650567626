// Rows whose diagonal a shift takes away.
#pragma once

#include <span>
#include <vector>

#include "sparse/matrix_family.hpp"

namespace stanchion {

/// Marks the rows of sum_t coefficients[t] values[t] whose diagonal entry is a hundredth or less of what its
/// terms would add up to: hardly a pivot of its own. Empty when they are less than a tenth of all rows: few
/// are delayed at little cost, and the order then is the same for all shifts. The family as unite() makes it.
/// Cost: linear in the rows.
std::vector<char> weak_diagonals(const MatrixFamily& family, std::span<const double> coefficients);

}  // namespace stanchion
