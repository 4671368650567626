// The certified inertia of one matrix, from factorizations of A_s - cI and A_s + cI.
#pragma once

#include <optional>
#include <string>

#include "numeric/factorization.hpp"
#include "stanchion/outcome.hpp"

namespace stanchion {

/// The factorization of A_s - offset I that a run left behind, factor and all.
struct KeptFactorization {
  double offset = 0;
  Factorization factorization;
};

struct OffsetOptions {
  bool definite_first = false;       ///< expect a positive definite matrix: try without pivoting, stop early
  bool definite_only = false;        ///< with definite_first: give up (level none) when that attempt fails
  std::optional<double> resolution;  ///< the offset c itself; absent: chosen, retried larger or smaller
  bool extended = false;             ///< factor in double-double: slow, for what double cannot tell apart
  double data_error = 0;             ///< bound on the 2-norm of what the scaled entries themselves may be off
  bool sharpen = true;               ///< where zeros are left, try again with a smaller offset
  std::optional<KeptFactorization>* keep = nullptr;  ///< takes the last factorization at a positive offset
  /// Only how many are positive for certain, when all but this many are: A_s + cI is not factored.
  std::optional<Index> all_positive_but;
  FactorOptions factor;  ///< threshold, cap, progress, cancellation; `definite` is set here
};

/// An inertia with its backing and what it cost.
struct CertifiedInertia {
  Inertia inertia;
  Certificate certificate;
  std::string unresolved_because;  ///< empty when certificate.level is proved
  Index factorizations = 0;
  Index redone_in_double = 0;    ///< factorizations in single precision whose bound did not close
  bool single_hopeless = false;  ///< one of them was far from closing: other shifts will hardly fare better
  Offset delayed_pivots = 0, two_by_two_pivots = 0, peak_bytes = 0;
  double exclusion_radius =
      0;               ///< relative test with a second matrix B: A + t B is nonsingular for |t| below; or 0
  double seconds = 0;  ///< of the factorizations
  double certify_seconds = 0;  ///< beyond them
};

/// Counts at both offsets and what follows: with bounds eta-, eta+ on the two backward errors and c above
/// both, at least m = n-(A_s + cI) eigenvalues are negative, at least n - k with k = n-(A_s - cI) are
/// positive, the k - m between are zero at the resolution c (of either sign). k = 0 proves positive
/// definiteness from one factorization, with lambda_min(A_s) >= c - eta-. Derivation: error_bound.md. The
/// offset of `matrix` is ignored. With `all_positive_but` the k others are undecided, c smaller on a second
/// try where more than the number given are. Without `resolution` c follows the bounds, so that an answer
/// exists unless the factorization breaks down; the zeros then say what the precision used could not tell
/// apart. Level: proved, or none with the reason. Errors: those of factorize(); internal when the counts
/// contradict the bounds (a fault of machine or program). Cost: one factorization in the good definite case,
/// otherwise two to six.
Result<CertifiedInertia> certify_by_offsets(const Analysis& analysis, const ShiftedMatrix& matrix,
                                            const OffsetOptions& options, ThreadPool& pool);

/// The least that an eigenvalue of A can be when A - `offset` I was factored with positive pivots alone and a
/// backward error of at most `bound`: their difference, rounded down; not positive where nothing follows.
constexpr double smallest_eigenvalue_bound(double offset, double bound) {
  return (offset - bound) * (1 - 0x1p-50);
}

/// What the signs say.
Verdict verdict_of(const Inertia& inertia, Level level);

}  // namespace stanchion
