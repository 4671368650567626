// What a kept factor of A_s - cI can do to a few vectors at once.
#pragma once

#include <functional>
#include <vector>

#include "base/threads.hpp"
#include "diagnose/columns.hpp"
#include "numeric/block_solve.hpp"
#include "numeric/factorization.hpp"

namespace stanchion {

class KeptFactor {
 public:
  /// The arguments outlive it; L is in double precision.
  KeptFactor(const Analysis& analysis, const Factor& factor, ThreadPool& pool)
      : factor_(factor), pool_(pool), solver_(analysis, factor, pool) {}

  /// x := (A_s - cI)^-1 x.
  void solve(Columns& x);

  /// x := L^-T |D|^-1 L^-1 x: positive definite, the inverse but for the signs of the pivots.
  void solve_absolute(Columns& x);

  /// x := L^-T |D|^-1/2 x. For Gaussian x the squares have the diagonal of the inverse as their mean, if D >
  /// 0.
  void half_solve(Columns& x);

  /// Negative pivots by group: group_of(position) in 0 .. groups - 1. A pair counts where its first one
  /// stands.
  template <class GroupOf>
  std::vector<Index> negative_pivots(Index groups, const GroupOf& group_of) const {
    std::vector<Index> count(static_cast<std::size_t>(groups), 0);
    each_negative_pivot([&](Index position) { ++count[static_cast<std::size_t>(group_of(position))]; });
    return count;
  }

  /// Up to `most` vectors L^-T v, v the eigenvectors of the pivots lowest in value: on their span the matrix
  /// factored is negative, if there are as many negative pivots. Fewer columns are filled where pivots run
  /// out.
  Columns lowest_pivot_vectors(Index most, Index* filled);

 private:
  void each_negative_pivot(const std::function<void(Index position)>& use) const;

  enum class Power { kInverse, kAbsoluteInverse, kAbsoluteRoot };
  void scale(double* block, Power power) const;

  const Factor& factor_;
  ThreadPool& pool_;
  BlockSolver solver_;
  LongVector<double> block_;  ///< eight columns of what is solved for
};

}  // namespace stanchion
