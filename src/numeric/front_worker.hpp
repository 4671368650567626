// One worker of the numeric phase: assembles a front, eliminates it, leaves its contribution block.
#pragma once

#include <atomic>
#include <memory>
#include <type_traits>
#include <vector>

#include "base/arena.hpp"
#include "base/shared_pages.hpp"
#include "dense/eliminate.hpp"
#include "numeric/factorization.hpp"
#include "numeric/fault_probe.hpp"
#include "numeric/front_rows.hpp"
#include "numeric/memory_ledger.hpp"

namespace stanchion {

/// What a front leaves for its parent: the Schur complement of the rows not eliminated, delayed columns
/// first.
template <class Scalar>
struct Contribution {
  Scalar* values = nullptr;       ///< contribution_layout(order)
  Scalar* row_error = nullptr;    ///< bound on the row sums of the error so far
  Scalar* row_sums = nullptr;     ///< row sums of |values|
  Scalar* image = nullptr;        ///< shares of L D L^T x from the pivots so far
  Scalar* image_error = nullptr;  ///< bound on the rounding of `image`
  Index order = 0;
  std::vector<Index> delayed;   ///< positions of the delayed columns
  std::shared_ptr<Scalar> own;  ///< set when the block left its worker's stack

  /// Points into `numbers`, contribution_numbers(order) of them.
  void place(Scalar* numbers);
};

/// State shared by the workers of one factorization.
template <class Scalar>
struct FactorRun {
  const Analysis& analysis;
  const ShiftedMatrix& matrix;
  const FactorOptions& options;
  std::vector<Contribution<Scalar>> waiting;  ///< per front, until its parent is assembled
  Factor* factor = nullptr;                   ///< null: discard
  MemoryLedger memory;
  std::atomic<double> flops_done{0};
  std::atomic<bool> abandon{false};     ///< a worker stopped, broke down, failed or was cancelled
  std::atomic<bool> stack_full{false};  ///< a front found no room on a stack that was sized by the forecast
  FaultProbe probe{};

  /// What makes a bound of a sum of bounds, each summed in Scalar: see src/inertia/error_bound.md, section 6.
  double slack() const {
    if constexpr (std::is_same_v<Scalar, double>) return 1.001;
    return 1.1 / (1 - 8 * Rounding<Scalar>::kUnit * (analysis.tree.rows + 1000.0));
  }

  /// A front found no room on its stack: the run fails, and may be had with larger ones.
  Status no_room() {
    stack_full = true;
    return memory.limit_reached();
  }
};

/// Serves one factorization after another: begin(), fronts, finish(). What it holds of memory it keeps for
/// the next.
template <class Scalar>
class FrontWorker {
 public:
  /// For matrices of `rows` rows; the stack is sized for `arena_doubles`. Throws std::bad_alloc.
  FrontWorker(Index rows, Offset arena_doubles);
  FrontWorker(FrontWorker&&) = delete;

  /// True when it has room for that much.
  bool fits(Index rows, Offset arena_doubles) const {
    return local_of_.size() == rows && arena_.capacity() >= arena_doubles;
  }

  /// True between begin() and finish() for that run.
  bool serves(const FactorRun<Scalar>& run) const { return run_ == &run; }

  /// Sets the counts to nothing and books what is held. `run` must outlive finish().
  void begin(FactorRun<Scalar>& run);

  /// Ends the use of the run: nothing is on the stack any more, at most `kept_doubles` of it stay in memory.
  void finish(Offset kept_doubles);

  /// Processes one front whose children are done. `team` null: on this thread alone.
  Status process(Index front, ThreadPool* team);

  /// Moves the contribution block of `front` off this worker's stack, which must hold nothing else.
  Status detach(Index front);

  /// Gives back the memory above what still waits on this worker's stack.
  Status trim();

  /// What this worker counted; valid after the run.
  std::vector<PivotSigns> signs;
  double largest_row_error = 0;
  Offset delayed_pivots = 0, two_by_two_pivots = 0;
  bool stopped = false, breakdown = false;
  Index fault_row = -1;   ///< first in elimination order; negative: none
  PageStore kept_memory;  ///< of the panels that are kept

 private:
  Status assemble(const FrontRows& rows, const BlockLowerOf<Scalar>& matrix, ThreadPool* team);
  void add_matrix_entries(const FrontRows& rows, const BlockLowerOf<Scalar>& matrix);
  void add_contribution(const Contribution<Scalar>& child, const BlockLowerOf<Scalar>& matrix,
                        ThreadPool* team);
  void count_pivots(const FrontRows& rows, const EliminationResult& result, double gamma);
  void bound_images(const FrontRows& rows, const EliminationResult& result);
  void check_image(Index row, double bound);
  Status keep_panel(const FrontRows& rows, const BlockLowerOf<Scalar>& matrix, Index eliminated);
  void pack(const FrontRows& rows, const BlockLowerOf<Scalar>& matrix, const EliminationResult& result,
            double gamma, Scalar* destination);
  Status book_arena();

  /// The stack holds doubles; numbers of any scalar lie in it.
  Scalar* push(Offset numbers) {
    return reinterpret_cast<Scalar*>(arena_.push(
        (numbers * Offset{sizeof(Scalar)} + Offset{sizeof(double)} - 1) / Offset{sizeof(double)}));
  }
  void pop_to(const Scalar* mark) { arena_.pop_to(reinterpret_cast<const double*>(mark)); }

  FactorRun<Scalar>* run_ = nullptr;
  Arena arena_;
  Offset booked_doubles_ = 0;
  SharedPages handed_on_;  ///< of blocks that left the stack
  EliminationScratchOf<Scalar> scratch_;
  Offset booked_scratch_ = 0;  ///< bytes
  Buffer<Index> local_of_;     ///< position -> row of the current front
  std::vector<Index> label_;   ///< row of the current front -> position
  std::vector<double> diagonal_, off_diagonal_;
  std::vector<Scalar> row_error_, growth_, addend_sums_;
  std::vector<Scalar> sign_, image_, image_error_;
  std::vector<Index> addends_;  ///< contribution blocks that reach a row
  std::vector<PivotKind> kind_;
  std::vector<Index> map_,
      run_end_;  ///< child row -> row of the current front, and where runs of neighbours end
};

}  // namespace stanchion
