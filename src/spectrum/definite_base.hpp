// A definite matrix with its factor kept, and how well the factor stands for the matrix: rigorous energy
// norms.
#pragma once

#include <memory>
#include <optional>
#include <vector>

#include "inertia/risk.hpp"
#include "numeric/block_solve.hpp"
#include "stanchion/outcome.hpp"

namespace stanchion {

/// What making a base took, whether it succeeded or not.
struct DefiniteBaseCost {
  Index factorizations = 0;
  double factor_seconds = 0, certify_seconds = 0;
};

struct DefiniteBaseOptions {
  FactorOptions factor;            ///< definite and keep_factor are set here
  double smallest_eigenvalue = 0;  ///< proved lower bound of the scaled matrix; 0: none known
  RiskBudget* risk = nullptr;  ///< for the relative test where no proof is close enough; null: proofs only
  std::uint64_t seed = 1;
  bool prove = false;  ///< where the bound known is not close enough: one or two factorizations for a better
  DefiniteBaseCost* cost = nullptr;  ///< null: not asked
};

/// B = M (I + F) M^T with M = L sqrt(D), ||F|| <= relative() < 1 and ||M^-1|| <= inverse_norm(). Vectors are
/// blocks of kBlockVectors doubles a row, in elimination order. Derivation: residual_bound.md.
class DefiniteBase {
 public:
  /// Nothing when B is not definite, or cannot be shown so. `analysis`, `pool` and what `matrix` refers to
  /// outlive the object. Errors: those of factorize() and certify_relative(). Cost: one factorization, kept,
  /// those of a proof if asked, and for the relative test two passes over L more.
  static Result<std::optional<DefiniteBase>> make(const Analysis& analysis, const ShiftedMatrix& matrix,
                                                  const DefiniteBaseOptions& options, ThreadPool& pool);

  /// block := M^-1 block and block := M^-T block. Cost: one pass over L.
  void solve(double* block);
  void transposed_solve(double* block);

  /// ||computed M^-1 b - M^-1 b|| <= inverse_norm() solve_error() ||computed||; and x = computed M^-T y
  /// solves M^T x = y + h with ||h|| <= solve_error() ||x||.
  double solve_error() const { return solve_error_; }
  double relative() const { return relative_; }
  double inverse_norm() const { return inverse_norm_; }
  const ShiftedMatrix& matrix() const { return matrix_; }
  /// What backs B definite and the two norms.
  const Certificate& certificate() const { return certificate_; }
  Index rows() const { return factorization_->factor->rows; }
  ThreadPool& pool() const { return *pool_; }

 private:
  DefiniteBase() = default;
  Result<bool> certify(const Analysis& analysis, const DefiniteBaseOptions& options, DefiniteBaseCost& cost);
  bool by_proof(double smallest_eigenvalue);
  Result<double> proved_bound(const Analysis& analysis, const DefiniteBaseOptions& options,
                              DefiniteBaseCost& cost) const;
  Result<bool> by_test(const Analysis& analysis, const DefiniteBaseOptions& options, DefiniteBaseCost& cost);

  ShiftedMatrix matrix_;
  ThreadPool* pool_ = nullptr;
  std::unique_ptr<Factorization> factorization_;
  std::unique_ptr<BlockSolver> solver_;
  std::vector<double> inverse_root_;  ///< 1 / sqrt(d) by position
  double solve_error_ = 0, relative_ = 1, inverse_norm_ = 0;
  Certificate certificate_;
};

}  // namespace stanchion
