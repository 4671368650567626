// Eigenvalues of small dense symmetric matrices.
#pragma once

#include <vector>

#include "stanchion/types.hpp"

namespace stanchion {

/// Ascending eigenvalues; vector k is column k: vectors[i * size + k].
struct SmallEigen {
  std::vector<double> values, vectors;
};

/// By cyclic Jacobi rotations (Golub and Van Loan, Matrix Computations, 4th ed. 2013, section 8.5), for sizes
/// up to about a hundred. `matrix`: size x size, symmetric.
SmallEigen small_eigen(std::vector<double> matrix, Index size);

}  // namespace stanchion
