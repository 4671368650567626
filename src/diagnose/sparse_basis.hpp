// Orthonormal vectors from sparse ones, kept sparse.
#pragma once

#include <vector>

#include "diagnose/dependent_columns.hpp"

namespace stanchion {

/// An entry of a unit vector that is not worth keeping.
constexpr double kNegligible = 1e-17;

/// Gram-Schmidt, twice, over vectors with entries in [0, rows): each against those before it that it meets.
/// Entries up to kNegligible are dropped, which keeps long strips of overlapping vectors sparse. Vectors that
/// depend on earlier ones are left out; ends early after `most_steps` multiplications or `most_entries` kept.
std::vector<SparseColumn> sparse_orthonormal(const std::vector<SparseColumn>& vectors, Index rows,
                                             Offset most_steps, Offset most_entries);

}  // namespace stanchion
