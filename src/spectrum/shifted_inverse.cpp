#include "spectrum/shifted_inverse.hpp"

#include <cmath>

namespace stanchion {
namespace {

constexpr Index kV = kBlockVectors;

/// The pivots of one front; a two by two block as D = b [a/b 1; 1 c/b].
void divide(const FactorFront& front, double* block) {
  for (Index k = 0; k < front.pivots; ++k) {
    double* first = block + Offset{front.position[k]} * kV;
    if (front.kind[k] == PivotKind::kOne) {
      for (Index v = 0; v < kV; ++v) first[v] /= front.diagonal[k];
    } else if (front.kind[k] == PivotKind::kTwoFirst) {
      double* second = block + Offset{front.position[k + 1]} * kV;
      const double b = front.off_diagonal[k], ab = front.diagonal[k] / b, cb = front.diagonal[k + 1] / b;
      const double inverse = 1 / (b * (ab * cb - 1));
      for (Index v = 0; v < kV; ++v) {
        const double f = first[v], g = second[v];
        first[v] = (cb * f - g) * inverse;
        second[v] = (ab * g - f) * inverse;
      }
    }
  }
}

}  // namespace

Result<std::optional<ShiftedInverse>> ShiftedInverse::make(const Analysis& analysis,
                                                           const ShiftedMatrix& matrix,
                                                           const FactorOptions& options, ThreadPool& pool) {
  FactorOptions factor_options = options;
  factor_options.definite = false;
  factor_options.keep_factor = true;
  auto factorization = factorize(analysis, matrix, factor_options, pool);
  if (!factorization.ok()) return factorization.status();
  if (Status sound = check_fault(analysis, *factorization); !sound.ok()) return sound;
  if (factorization->breakdown || factorization->signs.zero > 0) return std::optional<ShiftedInverse>{};
  ShiftedInverse inverse;
  inverse.factorization_ = std::make_unique<Factorization>(std::move(*factorization));
  inverse.solver_ = std::make_unique<BlockSolver>(analysis, *inverse.factorization_->factor, pool);
  return std::optional<ShiftedInverse>(std::move(inverse));
}

void ShiftedInverse::solve(double* block) {
  solver_->forward(block);
  for (const FactorFront& front : factorization_->factor->fronts) divide(front, block);
  solver_->backward(block);
}

}  // namespace stanchion
