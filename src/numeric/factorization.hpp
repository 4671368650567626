// The numeric phase: all pivots of a shifted matrix, and what they prove.
#pragma once

#include <algorithm>
#include <cstdint>
#include <memory>
#include <optional>
#include <span>
#include <vector>

#include "base/cancellation.hpp"
#include "base/page_store.hpp"
#include "base/threads.hpp"
#include "dense/kernels.hpp"
#include "sparse/matrix_family.hpp"
#include "stanchion/status.hpp"
#include "symbolic/analysis.hpp"

namespace stanchion {

/// Memory that factorizations of one pattern leave for the next: a later shift allocates next to nothing.
/// Safe to use by several factorizations at once, each of which then has its own part. What stays is bounded:
/// some 32 MiB of stack a worker, none where the factor is kept.
class FactorWorkspace {
 public:
  FactorWorkspace();
  ~FactorWorkspace();

  struct Parts;  ///< of factorize()
  Parts& parts() { return *parts_; }

 private:
  std::unique_ptr<Parts> parts_;
};

struct FactorOptions {
  bool definite = false;      ///< no pivoting, stop at the first pivot that is not positive
  bool keep_factor = false;   ///< keep L and D for solves; otherwise panels are dropped once used
  bool store_single = false;  ///< with keep_factor: L is rounded to float where it is stored, half the memory
  bool single = false;  ///< everything is computed and stored in float: a coarser bound, half the memory
  double pivot_threshold = 0.01;
  std::optional<Offset> memory_cap_bytes;  ///< of the numeric phase
  ProgressCallback progress;
  const CancellationToken* cancel = nullptr;
  std::uint64_t seed = 1;  ///< of the signs that detect faults; the factors do not depend on it
  std::shared_ptr<FactorWorkspace> workspace;  ///< null: memory of this factorization alone
};

/// One eliminated front: L (order x pivots, column-major, unit lower trapezoid), D, and the equations by
/// position. L is held in one of two precisions; the other span is empty.
struct FactorFront {
  Index pivots = 0, order = 0;
  std::span<double> lower;
  std::span<float> lower_single;

  /// Calls `use` with L's entries, whichever precision they have.
  template <class Use>
  void with_lower(const Use& use) const {
    if (lower_single.empty()) {
      use(lower.data());
    } else {
      use(lower_single.data());
    }
  }
  std::span<double> diagonal, off_diagonal;
  std::span<PivotKind> kind;
  std::span<Index> position;  ///< of every row of the front
};

/// P A P^T = L D L^T + E. In processing order: a front's rows are pivots of itself or of later fronts.
struct Factor {
  Index rows = 0;
  std::vector<FactorFront> fronts;
  std::vector<PageStore> memory;  ///< what the fronts point into
};

/// Signs of the pivots of one connected part; exact for L D L^T (Sylvester).
struct PivotSigns {
  Offset negative = 0, zero = 0, positive = 0;
  PivotSigns& operator+=(const PivotSigns& more) {
    negative += more.negative;
    zero += more.zero;
    positive += more.positive;
    return *this;
  }
};

struct Factorization {
  bool stopped = false;    ///< definite attempt met a pivot that is not positive; counts are not valid
  bool breakdown = false;  ///< overflow or pivots too small to divide by; counts are not valid
  bool fault = false;      ///< the machine or its memory computed wrongly; nothing is valid
  Index fault_row =
      -1;  ///< the first row, in elimination order, that differs from A x by more than its bound
  PivotSigns signs;
  std::vector<PivotSigns> component_signs;  ///< per connected part
  double error_bound = 0;                   ///< proved: ||E||_2, forming of the matrix included
  double unit_roundoff = 0x1p-53;           ///< of the arithmetic
  Offset delayed_pivots = 0, two_by_two_pivots = 0;
  Offset peak_bytes = 0;  ///< of the numeric phase, as allocated
  double seconds = 0;
  std::optional<Factor> factor;

  /// Adds what one worker counted (its members have the names used here) to the totals.
  template <class Worker>
  void collect(const Worker& worker) {
    stopped = stopped || worker.stopped;
    breakdown = breakdown || worker.breakdown;
    if (worker.fault_row >= 0) {
      fault_row = fault ? std::min(fault_row, worker.fault_row) : worker.fault_row;
      fault = true;
    }
    delayed_pivots += worker.delayed_pivots;
    two_by_two_pivots += worker.two_by_two_pivots;
    if (!(worker.largest_row_error <= error_bound)) error_bound = worker.largest_row_error;
    for (std::size_t c = 0; c < worker.signs.size(); ++c) {
      component_signs[c] += worker.signs[c];
      signs += worker.signs[c];
    }
  }
};

/// Most rows that may be factored in single precision: sums of so many bounds still say something.
constexpr Index kMostSingleRows = 1'000'000;

/// Factors `matrix` (in the elimination order of `analysis`). All threads of `pool` are used; the bits of the
/// result do not depend on their number. Errors: interrupted; resource limit "memory-cap" with the figure
/// reached, or "out-of-memory"; internal when `single` is asked for more than kMostSingleRows rows. Cost and
/// memory: see Analysis::forecast. `pool` must not be in use.
Result<Factorization> factorize(const Analysis& analysis, const ShiftedMatrix& matrix,
                                const FactorOptions& options, ThreadPool& pool);

/// Ok, or internal "machine-fault" naming the equation when the factorization found that the machine computed
/// wrongly: no answer may then be given. Whoever uses a Factorization asks this first.
Status check_fault(const Analysis& analysis, const Factorization& factorization);

/// x = A^-1 b by the factor, for `columns` right-hand sides stored one after the other (each factor.rows
/// long, in elimination order), in place. Zero pivots are an error "singular"; L must be in double. Cost: 4
/// entries of L a column.
Status solve(const Factor& factor, double* x, Index columns);

/// Solves and refines: x with A x = b until the residual stops falling or `most_steps`. Returns the largest
/// componentwise backward error max_i |b - A x|_i / (|A||x| + |b|)_i (Oettli and Prager) in *backward_error.
Status solve_refined(const Factor& factor, const ShiftedMatrix& matrix, std::span<const double> b,
                     std::span<double> x, int most_steps, double* backward_error);

}  // namespace stanchion
