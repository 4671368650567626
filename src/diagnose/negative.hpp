// The lowest eigenvectors of a matrix with negative directions.
#pragma once

#include <vector>

#include "diagnose/kept_factor.hpp"
#include "diagnose/near_zero.hpp"
#include "diagnose/node_motions.hpp"
#include "diagnose/subspace.hpp"

namespace stanchion {

struct NegativePairs {
  Columns x;  ///< unit vectors, columns [0, ritz.value.size()), ascending in value
  Ritz ritz;  ///< negative values only
  int rounds = 0;
};

/// At most `most` of the `negative` eigenpairs below zero: starts from the eigenvectors of the lowest pivots,
/// on whose span the matrix factored is negative, and goes on by locally optimal block preconditioned
/// conjugate gradients (Knyazev, SIAM J. Sci. Comput. 23 (2001) 517-541) with L^-T |D|^-1 L^-1. `zero`: pairs
/// to be kept out, those with |value| <= `zero_limit`. Cost: a round takes one solve and two products.
NegativePairs find_negative(const Structure& structure, const ShiftedMatrix& matrix, KeptFactor& factor,
                            const std::vector<NodeMotion>& motions, const NearZero& zero, double zero_limit,
                            Index negative, Index most, ThreadPool& pool);

}  // namespace stanchion
