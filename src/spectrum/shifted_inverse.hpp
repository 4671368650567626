// The inverse of a symmetric matrix at a shift inside its spectrum, for blocks of vectors: estimates only.
#pragma once

#include <memory>
#include <optional>

#include "numeric/block_solve.hpp"

namespace stanchion {

/// x = A^-1 b from P A P^T = L D L^T. Nothing is claimed of the result; what follows from it is judged by
/// residuals.
class ShiftedInverse {
 public:
  /// Nothing when the matrix is singular to working precision. `analysis` and `pool` outlive the object.
  /// Errors: those of factorize(). Cost: one factorization, kept.
  static Result<std::optional<ShiftedInverse>> make(const Analysis& analysis, const ShiftedMatrix& matrix,
                                                    const FactorOptions& options, ThreadPool& pool);

  /// block := A^-1 block; kBlockVectors doubles a row, in elimination order. Cost: two passes over L.
  void solve(double* block);

  double factor_seconds() const { return factorization_->seconds; }

 private:
  ShiftedInverse() = default;

  std::unique_ptr<Factorization> factorization_;
  std::unique_ptr<BlockSolver> solver_;
};

}  // namespace stanchion
