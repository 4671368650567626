// One worker of the extended factorization: assembles a front, eliminates it, leaves its contribution block.
#pragma once

#include <atomic>
#include <vector>

#include "base/arena.hpp"
#include "extended/eliminate.hpp"
#include "numeric/factorization.hpp"
#include "numeric/front_rows.hpp"
#include "numeric/memory_ledger.hpp"

namespace stanchion {

/// What a front leaves for its parent: the Schur complement of the rows not eliminated, delayed columns
/// first. Storage: the planes of a ScalarBlock, then three doubles a row and one a row and plane.
struct WaitingBlock {
  double* values = nullptr;
  double* row_error = nullptr;    ///< bound on the row sums of the error so far
  double* row_sums = nullptr;     ///< row sums of |values|
  double* image_error = nullptr;  ///< bound on the rounding of the image
  double* image = nullptr;        ///< planes of the share of L D L^T x that is still to grow
  Index order = 0;
  std::vector<Index> delayed;  ///< positions of the delayed columns
  Buffer<double> own;          ///< set when the block left its worker's stack

  /// Lays a block of `planes` out from `start` on; `order` is set.
  void place(double* start, Index planes) {
    values = start;
    row_error = values + planes * contribution_layout(order).size();
    row_sums = row_error + order;
    image_error = row_sums + order;
    image = image_error + order;
  }
};

/// A vector of signs x and A x in the scalar of the factorization: see numeric/fault_probe.hpp and
/// error_bound.md, section 7.
struct ScalarProbe {
  Buffer<signed char> sign;
  Buffer<double> product;        ///< a row: all planes one after the other
  Buffer<double> product_error;  ///< bound on its rounding
  Offset bytes() const {
    return sign.size() + (product.size() + product_error.size()) * Offset{sizeof(double)};
  }
};

/// State shared by the workers of one factorization.
struct ScalarRun {
  const Analysis& analysis;
  const ShiftedMatrix& matrix;
  const FactorOptions& options;
  std::vector<WaitingBlock> waiting;  ///< per front, until its parent is assembled
  MemoryLedger memory;
  ScalarProbe probe{};
  std::atomic<bool> abandon{false};     ///< a worker stopped, broke down, failed or was cancelled
  std::atomic<bool> stack_full{false};  ///< a front found no room on a stack that was sized by the forecast

  /// A front found no room on its stack: the run fails, and may be had with larger ones.
  Status no_room() {
    stack_full = true;
    return memory.limit_reached();
  }
};

template <class Scalar>
class ScalarWorker {
 public:
  ScalarWorker(ScalarRun& run, Offset arena_doubles);
  ~ScalarWorker();
  ScalarWorker(ScalarWorker&&) = delete;

  /// x and A x of `matrix`. Throws std::bad_alloc. Cost: one pass over the entries.
  static ScalarProbe draw_probe(const ShiftedMatrix& matrix, std::uint64_t seed);

  /// Processes one front whose children are done. `team` null: on this thread alone.
  Status process(Index front, ThreadPool* team);
  /// Moves the contribution block of `front` off this worker's stack, which must hold nothing else.
  Status detach(Index front);

  /// What this worker counted; valid after the run.
  std::vector<PivotSigns> signs;
  double largest_row_error = 0;
  Offset delayed_pivots = 0, two_by_two_pivots = 0;
  bool stopped = false, breakdown = false;
  Index fault_row = -1;  ///< first position whose image is off by more than its bound

 private:
  static constexpr Offset kPlanes = ScalarTraits<Scalar>::planes;
  static constexpr double kUnit = ScalarTraits<Scalar>::unit;
  /// Doubles of a waiting block.
  static Offset waiting_doubles(Index order) {
    return kPlanes * contribution_layout(order).size() + (3 + kPlanes) * Offset{order};
  }

  void assemble(const FrontRows& rows, const ScalarBlock<Scalar>& matrix, ThreadPool* team);
  void add_matrix_entries(const FrontRows& rows, const ScalarBlock<Scalar>& matrix);
  void add_contribution(Index child, const ScalarBlock<Scalar>& matrix, ThreadPool* team);
  double* release_children(Index front, double* storage);
  ScalarElimination eliminate(const FrontRows& rows, const ScalarBlock<Scalar>& matrix, ThreadPool* team);
  void bound_images(const FrontRows& rows, Index eliminated);
  void check_image(Index row, double bound);
  void count_pivots(const FrontRows& rows, const ScalarElimination& result);
  Status pack(const FrontRows& rows, const ScalarBlock<Scalar>& matrix, Index eliminated,
              double* destination);
  Status book_arena();

  ScalarRun& run_;
  Arena arena_;
  Offset booked_doubles_ = 0, booked_scratch_ = 0;
  ScalarScratch scratch_;
  Buffer<Index> local_of_;    ///< position -> row of the current front
  std::vector<Index> label_;  ///< row of the current front -> position
  std::vector<double> row_error_, growth_, addend_sums_, sums_;
  std::vector<double> sign_, image_, image_error_;  ///< image_: heads of all rows, then tails
  std::vector<Index> addends_, map_;  ///< contribution blocks that reach a row; child row -> front row
  std::vector<Scalar> diagonal_;
  std::vector<PivotKind> kind_;
};

}  // namespace stanchion
