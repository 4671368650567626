// A model ready to be factored at any shift: one analysis, the matrices in elimination order, one scaling.
#pragma once

#include <memory>
#include <span>
#include <vector>

#include "base/threads.hpp"
#include "engine/model_input.hpp"
#include "inertia/certify.hpp"
#include "model/library_count.hpp"
#include "model/question.hpp"
#include "sparse/matrix_family.hpp"
#include "spectrum/definite_base.hpp"
#include "spectrum/shifted_inverse.hpp"
#include "symbolic/analysis.hpp"

namespace stanchion {

/// An analysis that waits for the next matrix of its pattern.
struct SharedAnalysis {
  Buffer<Offset> column_start;  ///< of the pattern it was made for
  Buffer<Index> row;
  std::optional<Analysis> analysis;
  Index reused = 0;
};

/// Members of the family: the stiffness, the added matrices, and last the second matrix (or the identity).
class PreparedPencil {
 public:
  /// Takes the matrices out of `model`. `with_identity`: the second member is I (shifts of K alone).
  /// Fills timings, work and the memory forecast of `outcome`, and refuses what the cap cannot hold. Goes on
  /// with the risk that `outcome` has spent: one document, one budget. `shared`: see leave_analysis().
  static Result<PreparedPencil> make(ModelInput& model, bool with_identity, const Request& request,
                                     const RunContext& context, ThreadPool& pool, Outcome& outcome,
                                     SharedAnalysis* shared = nullptr);

  /// Ends the pencil's use and leaves its analysis for the next matrix; make() takes it where the pattern is
  /// the same.
  void leave_analysis(SharedAnalysis& shared) { shared.analysis = std::move(analysis_); }

  /// Certified inertia of K (with what is added) + factor * second. `definite_first`: see OffsetOptions.
  /// Books time and work into `outcome`.
  Result<CertifiedInertia> certify(double factor, bool definite_first, double data_error, ThreadPool& pool,
                                   Outcome& outcome);

  /// How many eigenvalues are positive for certain, from one factorization where all but `all_but` are; the
  /// others are undecided. By an offset in double precision: `offset`, in units of the scaled matrix, where
  /// it is known to be below the positive ones; another one where it is too small.
  Result<CertifiedInertia> certify_positive_side(double factor, Index all_but, std::optional<double> offset,
                                                 ThreadPool& pool, Outcome& outcome);

  /// As certify(), with a risk of its own: what event `number` of the document may fail with. Safe to call
  /// side by side, each call with its own `pool` and `scratch`; each may keep a factor in one of `share`
  /// parts of the memory.
  Result<CertifiedInertia> certify_apart(double factor, bool definite_first, double data_error, Index number,
                                         int share, ThreadPool& pool, Outcome& scratch) const;

  /// Numbers for `many` calls of certify_apart: the first of them.
  Index reserve_events(Index many) { return risk_->reserve(many); }

  /// Books what `scratch` holds of time, work, risk and warnings into `outcome`.
  void merge(const Outcome& scratch, Outcome& outcome);

  /// How many counts may run side by side on `most` threads, each with the most memory it may take, in `room`
  /// bytes.
  int side_by_side(int most, Offset room) const;

  /// What `many` of them, each by `threads`, are likely to take together, with all that is in use.
  Offset bytes_side_by_side(int many, int threads) const;

  /// K with what is added plus `factor` times the second matrix, definite, with its factor kept; nothing when
  /// it is not definite. `smallest_eigenvalue`: a proved bound of it, or 0; where that says too little,
  /// `prove` looks for a better one. Charged to the document where a test is needed. The base refers to this
  /// pencil and to `pool`.
  Result<std::optional<DefiniteBase>> definite_base(double factor, double smallest_eigenvalue, bool prove,
                                                    ThreadPool& pool, Outcome& outcome);

  /// The inverse of K with what is added plus `factor` times the second matrix, for estimates; nothing when
  /// it is singular to working precision, or the factor does not fit into the memory.
  Result<std::optional<ShiftedInverse>> shifted_inverse(double factor, ThreadPool& pool, Outcome& outcome);

  /// `coefficient` times the second matrix, scaled, in elimination order.
  ShiftedMatrix second(double coefficient) const;

  /// `vector` (of the scaled matrix, by elimination position) as a mode shape by equation of the files.
  Mode mode_of(const std::vector<double>& vector, double value, double residual) const;

  /// Bytes that may still be used, by the cap or by what the machine has.
  Offset free_bytes() const { return bytes_for_factor(); }

  /// ||S K S|| over ||S (second) S||, in the infinity norm: the factor at which the two are of one size.
  double size_ratio() const;

  /// As certify(0, ...), by two offsets in double precision, leaving the factor of A_s - cI in `kept`.
  /// `resolution`: the offset c to use; absent: chosen, and not sharpened where zeros are left. Resource
  /// limit "memory-cap" when the factor cannot be kept.
  Result<CertifiedInertia> certify_keeping(std::optional<double> resolution, double data_error,
                                           std::optional<KeptFactorization>& kept, ThreadPool& pool,
                                           Outcome& outcome);

  /// A vector x with x^T A x < 0 beyond its rounding, A = K with what is added; nothing when none is found.
  /// Its entries are placed by `original` (see ModelInput) among `file_rows` equations. Keeps a factor for
  /// the while.
  Result<std::optional<Witness>> find_witness(const std::vector<Index>& original, Index file_rows,
                                              ThreadPool& pool, Outcome& outcome);

  /// mu with S (second) S >= mu I, S the pencil's scaling, from a certified bound for the second matrix under
  /// its own scaling; 0 when nothing follows. For K alone the second matrix is I.
  double second_matrix_bound() const { return second_bound_; }

  /// For a diagonal second matrix; `digits`: for every matrix that rounds to it.
  void set_second_bound_from_diagonal(std::optional<int> digits);

  /// The scaled K (with what is added) + factor * second, less offset on its diagonal, each entry as a
  /// factorization in double forms it; in elimination order.
  TripletMatrix formed(double factor, double offset) const;

  /// See likely_work() of inertia/certify.hpp.
  LikelyWork likely_work(bool definite_first) const;
  Offset entries() const { return family_.entries(); }

  /// The second matrix alone; `digits`: every matrix that rounds to it.
  Result<CertifiedInertia> certify_second(std::optional<int> digits, ThreadPool& pool, Outcome& outcome);

  /// Half a unit of decimal digit `digits` of every entry at `factor`, as a bound on the 2-norm.
  double digits_error(double factor, int digits) const;

  /// K with what is added, plus `factor` times the second matrix: scaled, in elimination order.
  ShiftedMatrix combination(double factor) const;

  const Analysis& analysis() const { return analysis_; }
  bool has_second() const { return has_second_; }
  std::uint64_t seed() const { return seed_; }

 private:
  ShiftedMatrix second_alone() const;
  double digits_error(const ShiftedMatrix& matrix, int digits) const;
  Result<CertifiedInertia> run(const ShiftedMatrix& matrix, const OffsetOptions& options, ThreadPool& pool,
                               Outcome& outcome);
  Result<CertifiedInertia> run_on(const ShiftedMatrix& matrix, const CertifyOptions& options,
                                  RiskBudget& risk, int share, ThreadPool& pool, Outcome& outcome) const;
  Status cannot_keep_factor(Offset needed, const Outcome& outcome) const;
  Offset counting_bytes() const;
  Offset bytes_of_one_count(int threads, bool likely) const;
  Offset bytes_for_factor() const;

  Analysis analysis_;
  MatrixFamily family_;
  Buffer<double> scale_;
  std::vector<double> added_factors_;
  std::vector<Index> original_;  ///< see ModelInput
  Index file_rows_ = 0;
  bool has_second_ = false, extended_ = false;
  SingleUse single_ = SingleUse::kNever;  ///< for the counts to come: what failed badly is not tried again
  double second_bound_ = 0;
  Offset resident_before_ = 0;  ///< of the process, before the first factorization
  std::optional<double> resolution_;
  std::optional<Offset> memory_cap_;
  FactorOptions factor_options_;
  std::shared_ptr<RiskBudget> risk_;  ///< of the document
  std::uint64_t seed_ = 1;            ///< the user's, mixed with the digests of the inputs
};

/// What a run may take of the machine for `bytes` that it asks for: the allocator keeps freed pages, one
/// arena a thread. Measured: at most 7 % and 2 MiB on 2 threads.
Offset with_allowance(Offset bytes);

/// What multiplies the second matrix at a shift: the load factor with its sign, or minus the eigenvalue.
double second_factor(const Request& request, double shift);

/// Threads asked for, or all available.
int threads_of(const Request& request);

/// Fields every outcome has; call first.
Outcome begin_outcome(const char* command, const Request& request, Question question);

/// Peak memory and total time; call last.
void finish_outcome(Outcome& outcome, double total_seconds);

}  // namespace stanchion
