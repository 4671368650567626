// One worker of the numeric phase: assembles a front, eliminates it, leaves its contribution block.
#pragma once

#include <atomic>
#include <vector>

#include "base/arena.hpp"
#include "dense/eliminate.hpp"
#include "numeric/factorization.hpp"
#include "numeric/fault_probe.hpp"
#include "numeric/front_rows.hpp"
#include "numeric/memory_ledger.hpp"

namespace stanchion {

/// What a front leaves for its parent: the Schur complement of the rows not eliminated, delayed columns
/// first.
struct Contribution {
  double* values = nullptr;       ///< contribution_layout(order)
  double* row_error = nullptr;    ///< bound on the row sums of the error so far
  double* row_sums = nullptr;     ///< row sums of |values|
  double* image = nullptr;        ///< shares of L D L^T x from the pivots so far
  double* image_error = nullptr;  ///< bound on the rounding of `image`
  Index order = 0;
  std::vector<Index> delayed;  ///< positions of the delayed columns
  Buffer<double> own;          ///< set when the block left its worker's stack

  /// Points into `doubles`, contribution_doubles(order) of them.
  void place(double* doubles);
};

/// State shared by the workers of one factorization.
struct FactorRun {
  const Analysis& analysis;
  const ShiftedMatrix& matrix;
  const FactorOptions& options;
  std::vector<std::vector<Index>> children;  ///< of every front, in processing order
  std::vector<Contribution> waiting;         ///< per front, until its parent is assembled
  Factor* factor = nullptr;                  ///< null: discard
  MemoryLedger memory;
  std::atomic<double> flops_done{0};
  std::atomic<bool> abandon{false};  ///< a worker stopped, broke down, failed or was cancelled
  FaultProbe probe{};
};

class FrontWorker {
 public:
  FrontWorker(FactorRun& run, Offset arena_doubles);
  ~FrontWorker();
  FrontWorker(FrontWorker&&) = delete;

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
  Status assemble(const FrontRows& rows, const BlockLower& matrix, ThreadPool* team);
  void add_matrix_entries(const FrontRows& rows, const BlockLower& matrix);
  void add_contribution(const Contribution& child, const BlockLower& matrix, ThreadPool* team);
  void count_pivots(const FrontRows& rows, const EliminationResult& result, double gamma);
  void bound_images(const FrontRows& rows, const EliminationResult& result);
  void check_image(Index row, double bound);
  Status keep_panel(const FrontRows& rows, const BlockLower& matrix, Index eliminated);
  void pack(const FrontRows& rows, const BlockLower& matrix, const EliminationResult& result, double gamma,
            double* destination);
  Status book_arena();

  FactorRun& run_;
  Arena arena_;
  Offset booked_doubles_ = 0;
  EliminationScratch scratch_;
  Offset booked_scratch_ = 0;
  Buffer<Index> local_of_;    ///< position -> row of the current front
  std::vector<Index> label_;  ///< row of the current front -> position
  std::vector<double> row_error_, growth_, addend_sums_, diagonal_, off_diagonal_;
  std::vector<double> sign_, image_, image_error_;
  std::vector<Index> addends_;  ///< contribution blocks that reach a row
  std::vector<PivotKind> kind_;
  std::vector<Index> map_,
      run_end_;  ///< child row -> row of the current front, and where runs of neighbours end
};

}  // namespace stanchion
