// The lowest eigenvectors of a matrix with negative directions.
#pragma once

#include <cstdint>
#include <vector>

#include "diagnose/constraint_space.hpp"
#include "diagnose/kept_factor.hpp"
#include "diagnose/local_motions.hpp"
#include "diagnose/near_zero.hpp"
#include "diagnose/subspace.hpp"

namespace stanchion {

struct NegativePairs {
  Columns x;  ///< unit vectors, columns [0, ritz.value.size()), ascending in value
  Ritz ritz;  ///< negative values only
  int rounds = 0;
};

struct NegativeSearch {
  const Structure& structure;
  const ShiftedMatrix& matrix;
  KeptFactor& factor;
  const LocalMotions& motions;  ///< to be kept out
  const NearZero& zero;         ///< to be kept out: pairs with |value| <= zero_limit
  double zero_limit;
  const ConstraintSpace* constraints;  ///< null without multipliers
  std::uint64_t seed;
};

/// At most `most` of the `negative` eigenpairs below zero: starts from the eigenvectors of the lowest pivots,
/// on whose span the matrix factored is negative, and goes on by locally optimal block preconditioned
/// conjugate gradients (Knyazev, SIAM J. Sci. Comput. 23 (2001) 517-541) with L^-T |D|^-1 L^-1. With
/// constraints the pairs are those of P A P, P the projection on the motions that the constraints leave.
/// Cost: a round takes one solve and two products.
NegativePairs find_negative(const NegativeSearch& search, Index negative, Index most, ThreadPool& pool);

/// Vectors that find_negative() holds at most while it looks for `wanted`.
Index negative_columns(Index wanted);

}  // namespace stanchion
