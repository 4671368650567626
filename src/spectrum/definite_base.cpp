#include "spectrum/definite_base.hpp"

#include <algorithm>
#include <cmath>

#include "inertia/relative.hpp"
#include "inertia/two_offsets.hpp"

namespace stanchion {
namespace {

constexpr Index kV = kBlockVectors;
constexpr double kUnit = 0x1p-53;
/// A proof is used when it bounds F this far below 1; else the test says more.
constexpr double kCloseEnough = 0.25;
/// Offsets of a proof, in bounds on the backward error: a sharp one, and one that is still close enough.
constexpr double kOffsets[] = {256, 16};

}  // namespace

Result<std::optional<DefiniteBase>> DefiniteBase::make(const Analysis& analysis, const ShiftedMatrix& matrix,
                                                       const DefiniteBaseOptions& options, ThreadPool& pool) {
  DefiniteBaseCost unasked;
  DefiniteBaseCost& cost = options.cost != nullptr ? *options.cost : unasked;
  DefiniteBase base;
  base.matrix_ = matrix;
  base.matrix_.offset = 0;
  base.pool_ = &pool;
  FactorOptions factor_options = options.factor;
  factor_options.definite = true;
  factor_options.keep_factor = true;
  auto factorization = factorize(analysis, base.matrix_, factor_options, pool);
  if (!factorization.ok()) return factorization.status();
  if (Status sound = check_fault(analysis, *factorization); !sound.ok()) return sound;
  ++cost.factorizations;
  cost.factor_seconds += factorization->seconds;
  if (factorization->stopped || factorization->breakdown || !std::isfinite(factorization->error_bound)) {
    return std::optional<DefiniteBase>{};
  }
  base.factorization_ = std::make_unique<Factorization>(std::move(*factorization));
  const Factor& factor = *base.factorization_->factor;
  base.solver_ = std::make_unique<BlockSolver>(analysis, factor, pool);
  base.inverse_root_.resize(static_cast<std::size_t>(factor.rows));
  for (const FactorFront& front : factor.fronts) {
    for (Index k = 0; k < front.pivots; ++k) {
      if (front.kind[k] != PivotKind::kOne || !(front.diagonal[k] > 0)) return std::optional<DefiniteBase>{};
      base.inverse_root_[static_cast<std::size_t>(front.position[k])] = 1 / std::sqrt(front.diagonal[k]);
    }
  }
  // || |M| || from the growth inside the error bound, as in the relative test; 16 roundings for T.
  const double growth = base.factorization_->error_bound / (42 * kUnit);
  base.solve_error_ = 1.01 * kUnit * (base.solver_->longest_path() + 16) * std::sqrt(growth);
  auto passed = base.certify(analysis, options, cost);
  if (!passed.ok()) return passed.status();
  if (!*passed) return std::optional<DefiniteBase>{};
  return std::optional<DefiniteBase>(std::move(base));
}

Result<bool> DefiniteBase::certify(const Analysis& analysis, const DefiniteBaseOptions& options,
                                   DefiniteBaseCost& cost) {
  if (by_proof(options.smallest_eigenvalue)) return true;
  if (options.prove) {
    auto bound = proved_bound(analysis, options, cost);
    if (!bound.ok()) return bound.status();
    if (by_proof(*bound)) return true;
  }
  return by_test(analysis, options, cost);
}

/// A lower bound of the smallest eigenvalue from B - c I, definite, c so far above the backward error of B's
/// own factor that the bound is close enough; 0 where none is found, or memory does not allow.
Result<double> DefiniteBase::proved_bound(const Analysis& analysis, const DefiniteBaseOptions& options,
                                          DefiniteBaseCost& cost) const {
  FactorOptions factor_options = options.factor;
  factor_options.definite = true;
  factor_options.keep_factor = false;
  for (const double many : kOffsets) {
    ShiftedMatrix shifted = matrix_;
    shifted.offset = many * factorization_->error_bound;
    auto attempt = factorize(analysis, shifted, factor_options, *pool_);
    if (!attempt.ok()) {
      if (attempt.status().kind() == StatusKind::kResourceLimit) return 0.0;
      return attempt.status();
    }
    if (Status sound = check_fault(analysis, *attempt); !sound.ok()) return sound;
    ++cost.factorizations;
    cost.factor_seconds += attempt->seconds;
    if (attempt->stopped || attempt->breakdown || !std::isfinite(attempt->error_bound)) continue;
    return std::max(0.0, smallest_eigenvalue_bound(shifted.offset, attempt->error_bound));
  }
  return 0.0;
}

/// ||B - M M^T|| <= eta, error_bound and the rounding of the roots; then ||M^-1||^2 <= 1 / (kappa - eta).
bool DefiniteBase::by_proof(double smallest_eigenvalue) {
  const double eta = factorization_->error_bound * 1.1;
  const double least = smallest_eigenvalue_bound(smallest_eigenvalue, eta);  // of M M^T, by Weyl
  if (!(least > 0) || !(eta / least < kCloseEnough)) return false;
  relative_ = eta / least * (1 + 0x1p-50);
  inverse_norm_ = 1 / std::sqrt(least) * (1 + 0x1p-50);
  certificate_.level = Level::kProved;
  certificate_.method = "offsets";
  certificate_.error_bound = eta;
  certificate_.smallest_eigenvalue_above = smallest_eigenvalue;
  certificate_.relative_bound = relative_;
  return true;
}

Result<bool> DefiniteBase::by_test(const Analysis& analysis, const DefiniteBaseOptions& options,
                                   DefiniteBaseCost& cost) {
  if (options.risk == nullptr) return false;
  auto test = certify_relative(analysis, matrix_, *factorization_, *options.risk, options.seed, *pool_);
  if (!test.ok()) return test.status();
  cost.certify_seconds += test->seconds;
  if (!test->certified || test->negative > 0 || !(test->inverse_norm > 0)) return false;
  relative_ = test->relative_bound;
  inverse_norm_ = test->inverse_norm;
  certificate_.level = Level::kStatistical;
  certificate_.method = "relative";
  certificate_.error_bound = factorization_->error_bound;
  certificate_.relative_bound = relative_;
  certificate_.failure_probability = test->failure_probability;
  return true;
}

void DefiniteBase::solve(double* block) {
  solver_->forward(block);
  for (std::size_t i = 0; i < inverse_root_.size(); ++i) {
    for (Index v = 0; v < kV; ++v) block[i * kV + static_cast<std::size_t>(v)] *= inverse_root_[i];
  }
}

void DefiniteBase::transposed_solve(double* block) {
  for (std::size_t i = 0; i < inverse_root_.size(); ++i) {
    for (Index v = 0; v < kV; ++v) block[i * kV + static_cast<std::size_t>(v)] *= inverse_root_[i];
  }
  solver_->backward(block);
}

}  // namespace stanchion
