// Saddle point matrices [K B^T; B 0]: the rank of the constraints B, and the structure on them.
#pragma once

#include <vector>

#include "engine/prepared_pencil.hpp"

namespace stanchion {

/// What is known of the rank of B, from a factorization of [I B^T; B 0] of its own.
struct ConstraintRank {
  Index multipliers = 0;      ///< q
  Index least = 0, most = 0;  ///< the rank lies between; equal when known
  Backing backing;            ///< of that statement
  std::vector<Index>
      repeated;          ///< equations of multipliers whose row of B follows exactly from those of others
  bool bordered = true;  ///< false: multipliers act on each other, the theory below does not apply
};

/// Certifies the rank of the constraint rows. Rows that follow exactly from others are found and set aside
/// first, for no factorization in floating point can prove a matrix rank deficient. A is the stiffness of
/// `model` with what is added; where something is added to the constraint rows themselves their sum is not
/// formed and the rank is not known.
Result<ConstraintRank> certify_constraint_rank(const ModelInput& model, const Request& request,
                                               const RunContext& context, ThreadPool& pool, Outcome& outcome);

/// In(A) = In(Z^T K Z) + (p, p, q - p), p = rank(B), Z a basis of null(B) (Gould, Math. Program. 32 (1985);
/// Haynsworth, Linear Algebra Appl. 1 (1968)). With p known only as a range, so is the answer. `original`:
/// see ModelInput. `certificate`: of `inertia`, which is that of A.
ConstrainedOutcome judge_on_constraints(const Inertia& inertia, const Certificate& certificate,
                                        const ConstraintRank& rank, const std::vector<Index>& original);

}  // namespace stanchion
