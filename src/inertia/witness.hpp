// A vector that proves to anyone that a matrix is not positive definite.
#pragma once

#include <optional>
#include <vector>

#include "numeric/factorization.hpp"

namespace stanchion {

/// x with x^T A x < 0 beyond its own rounding, A = sum_t c_t A_t the matrix itself (not scaled).
struct NegativeDirection {
  std::vector<double> x;      ///< by elimination position
  double quadratic_form = 0;  ///< x^T A x as computed
  double error_bound = 0;     ///< |computed - exact|; quadratic_form + error_bound < 0
};

/// Tries the eight negative pivots largest in size: x = S P^T L^-T v with v the pivot's negative eigenvector
/// makes x^T A x about the pivot itself. The form is evaluated from the data in double-double. Nothing is
/// returned when no candidate is negative beyond its rounding; one exists only if the smallest eigenvalue is
/// negative. `factorization` keeps its factor. Cost: one pass over L and one over the entries.
std::optional<NegativeDirection> find_negative_direction(const Analysis& analysis,
                                                         const ShiftedMatrix& matrix,
                                                         const Factorization& factorization,
                                                         ThreadPool& pool);

}  // namespace stanchion
