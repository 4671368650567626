// Largest eigenvalues in size, of either sign, of a symmetric operator: block Lanczos with full
// orthogonalisation.
#pragma once

#include <cstdint>
#include <functional>
#include <vector>

#include "base/buffer.hpp"
#include "base/cancellation.hpp"
#include "base/threads.hpp"
#include "numeric/block_kernels.hpp"
#include "stanchion/status.hpp"

namespace stanchion {

/// An approximate eigenvalue and how far its vector is from being one, both as computed: estimates, no
/// bounds.
struct RitzValue {
  double value = 0, residual = 0;
  Index column = 0;  ///< of the basis rotation, for vectors()
};

/// How many approximations of either sign a full basis is reduced to.
struct KeptValues {
  Index positive = 0, negative = 0;
};

/// Blocks of eight vectors, so that the operator reads its factor once for all of them and clusters of up to
/// eight come out together; every new block is orthogonalised against the whole basis (Golub and
/// Underwood 1977; Parlett, The Symmetric Eigenvalue Problem, 1998, ch. 13). When the basis is full it is
/// reduced to the best approximations (thick restart; Wu and Simon, SIAM J. Matrix Anal. 22 (2000)). Same
/// bits for any number of threads.
class BlockLanczos {
 public:
  using Operator = std::function<void(double* block)>;  ///< in place, kBlockVectors doubles a row

  /// `most_columns`: of the basis, a multiple of kBlockVectors, at least six blocks. Up to 320 rows, and up
  /// to 1,024 where the basis may take half of them, the whole space is taken at once. `seed` draws the first
  /// block. Throws std::bad_alloc. Memory: most_columns + 16
  /// doubles a row.
  BlockLanczos(Operator apply, Index rows, Index most_columns, std::uint64_t seed, ThreadPool& pool);

  /// One application of the operator: eight more basis vectors, after a restart that keeps `keep`
  /// approximations when there is no room. False when the space is exhausted: the approximations are then all
  /// there is.
  bool step(const KeptValues& keep);

  /// A block of fresh random vectors joins the space: for what the first one may have missed. Up to 1,024
  /// rows the whole space takes its place.
  void inject();

  /// Approximations from the space so far, by size of the value, largest first. Cost: columns()^3, of a whole
  /// space once.
  const std::vector<RitzValue>& ritz_values();

  /// block := up to eight approximate eigenvectors, columns beyond them zero. Call ritz_values() before.
  void vectors(const std::vector<RitzValue>& chosen, std::vector<double>& block) const;

  /// The space is everything there is: nothing can have been missed.
  bool whole() const { return whole_; }
  Index columns() const { return columns_; }
  Index steps() const { return steps_; }

 private:
  static constexpr Index kV = kBlockVectors;
  void draw(double* block);
  void project(const double* block, Index first, std::vector<double>& coefficients) const;
  void take(double* block, const std::vector<double>& coefficients, Index first) const;
  bool much_was_taken(const double* block, const std::vector<double>& taken) const;
  void orthogonalise(double* block, Index recent, std::vector<double>& coefficients) const;
  void orthonormalise(double* block, std::vector<double>* triangle);
  void take_whole_space();
  void append(const double* block);
  void restart(const KeptValues& keep);
  void for_pieces(const std::function<void(Offset begin, Offset end, Offset piece)>& work) const;

  Operator apply_;
  Index rows_, most_columns_, columns_ = 0, steps_ = 0;
  std::uint64_t seed_, drawn_ = 0;
  ThreadPool& pool_;
  Buffer<double> basis_;           ///< most_columns_ doubles a row
  std::vector<double> projected_;  ///< Q^T A Q, most_columns_ x most_columns_, column-major
  std::vector<double> next_;       ///< orthonormal block that joins the basis at the next step
  std::vector<double> image_;      ///< what the operator makes of it: memory from step to step
  std::vector<double> coupling_;   ///< A Q_last = Q (...) + next coupling, 8 x 8
  std::vector<double> rotation_;   ///< eigenvectors of the projected operator
  std::vector<RitzValue> ritz_;
  bool exhausted_ = false, whole_ = false;
};

}  // namespace stanchion
