// Eigenvalues and vectors of a small dense symmetric matrix, from the LAPACK at hand.
#pragma once

#include <span>

#include "stanchion/types.hpp"

namespace stanchion {

/// `matrix`: n x n, column-major, lower triangle read; replaced by the orthonormal eigenvectors, a column
/// each. `values`: n, ascending. False when the iteration did not converge or an entry is no number. Nothing
/// rigorous is claimed of the result. Cost: some 9 n^3.
bool symmetric_eigen(Index n, std::span<double> matrix, std::span<double> values);

}  // namespace stanchion
