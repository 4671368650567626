// Triangular solves and products with the factor for a block of eight vectors, on all threads.
#pragma once

#include "base/threads.hpp"
#include "numeric/block_kernels.hpp"
#include "numeric/factorization.hpp"

namespace stanchion {

/// Passes over a kept factor. Blocks hold kBlockVectors doubles a row, rows in elimination order. The results
/// have the same bits for any number of threads. One object serves one caller at a time.
class BlockSolver {
 public:
  /// `analysis` and `factor` belong together and outlive the solver. Cost: one pass over the row lists.
  BlockSolver(const Analysis& analysis, const Factor& factor, ThreadPool& pool);

  /// block := L^-1 block. Cost: 2 kBlockVectors entries of L; reads L once.
  void forward(double* block);

  /// block := L^-T block. Same cost.
  void backward(double* block);

  /// Longest chain of additions any entry of forward() or backward() goes through: both satisfy
  /// |L x - b| <= gamma |L||x| with gamma = longest_path() u / (1 - longest_path() u), and so for L^T
  /// (Higham, Accuracy and Stability, 2nd ed., Lemma 8.4, which holds for any order of summation).
  Index longest_path() const { return longest_path_; }

 private:
  struct Scratch;
  void forward_front(Index front, double* block, Scratch& scratch, ThreadPool* team);
  void backward_front(Index front, double* block, Scratch& scratch, ThreadPool* team);
  void measure_paths();

  const Analysis& analysis_;
  const Factor& factor_;
  ThreadPool& pool_;
  std::vector<std::vector<double>>
      passed_up_;  ///< per front, its sums for rows below, until its parent takes them
  Index longest_path_ = 0;
};

}  // namespace stanchion
