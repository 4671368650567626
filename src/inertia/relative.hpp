// The relative test: one factorization certifies its own inertia, definite or not.
#pragma once

#include <cstdint>

#include "inertia/risk.hpp"
#include "numeric/factorization.hpp"

namespace stanchion {

struct RelativeResult {
  bool certified = false;     ///< ||F|| < 1: In(A_s) = In(J), but for the failure probability charged
  double relative_bound = 0;  ///< bound on ||F|| = ||M^-1 A_s M^-T - J||; infinite when nothing follows
  double failure_probability = 0;
  Offset negative = 0, positive = 0;  ///< of J
  int power_steps = 0;                ///< applications of F
  double exclusion_radius =
      0;                    ///< with a second matrix B: A + t B is nonsingular for |t| below it; 0: not asked
  double inverse_norm = 0;  ///< beta >= ||M^-1||, by the same events; 0 when nothing follows
  double seconds = 0;
  /// Parts of the bound of the first application, each over g: measured, evaluation of M^T y, evaluation of b
  /// and z.
  double measured_part = 0, transposed_part = 0, residual_part = 0;
};

/// With M = P^T L T, D ~ T J T^T, takes Gaussian w_i and forms y = M^-T w, b = A_s y in double-double from
/// the data, z = M^-1 b, v = z - J w. Accepts when ||v|| + 2 ||h|| + beta ||rho|| < g for all i, where h and
/// rho bound every rounding and beta >= ||M^-1|| comes from ||y||. Derivation and constants:
/// relative_bound.md. When the bound is above 1 because of what was measured, F is applied up to three times
/// more to the same vectors. `second` not null: also a radius around this shift within which A + t B stays
/// nonsingular (one more event is charged with the attempt; one more product and solve). How L and D were
/// made does not matter. `matrix` may carry an offset; `factorization` keeps its factor. `risk`: one attempt
/// is charged before the vectors are drawn, keyed by (seed, attempt). Reproducible for any number of threads.
/// Errors: resource limit "out-of-memory". Cost: two passes over L and one over the entries.
Result<RelativeResult> certify_relative(const Analysis& analysis, const ShiftedMatrix& matrix,
                                        const Factorization& factorization, RiskBudget& risk,
                                        std::uint64_t seed, ThreadPool& pool,
                                        const ShiftedMatrix* second = nullptr);

}  // namespace stanchion
