// A diagonal congruence by powers of two: exact, and the inertia stays.
#pragma once

#include "sparse/matrix_family.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// Powers of two s with rows of |S A S| of comparable size, A = sum of coefficients times members.
/// Where the diagonal is positive and dominates (|a_ij|^2 <= a_ii a_jj for all entries, as in every positive
/// definite matrix) s_i = 2^-round(log2(a_ii) / 2); otherwise rows are equilibrated in the maximum norm
/// (Ruiz, RAL-TR-2001-034). Errors: bad input "scaling-range" when entries of S A S would leave [2^-900,
/// 2^900] upwards. Cost: a few passes over the entries by all threads of
/// `pool`, if there is one. Reproducible, the same for any number of threads.
Result<Buffer<double>> power_of_two_scaling(const MatrixFamily& family, std::span<const double> coefficients,
                                            ThreadPool* pool = nullptr);

}  // namespace stanchion
