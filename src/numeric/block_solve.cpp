#include "numeric/block_solve.hpp"

#include <algorithm>

#include "dense/trailing_update.hpp"

namespace stanchion {
namespace {

constexpr Index kV = kBlockVectors;
constexpr Index kSolveTile = 64;   ///< pivots solved by substitution at a time
constexpr Index kSolveRows = 512;  ///< rows of one piece of a panel product

}  // namespace

/// Work space of one thread.
struct BlockSolver::Scratch {
  std::vector<double> local;    ///< rows of the front x kV
  std::vector<Index> local_of;  ///< position -> row of the current front
};

BlockSolver::BlockSolver(const Analysis& analysis, const Factor& factor, ThreadPool& pool)
    : analysis_(analysis), factor_(factor), pool_(pool) {
  passed_up_.resize(static_cast<std::size_t>(analysis.tree.fronts));
  measure_paths();
}

void BlockSolver::measure_paths() {
  const AssemblyTree& tree = analysis_.tree;
  std::vector<Index> path(static_cast<std::size_t>(tree.fronts), 0);
  for (std::size_t f = 0; f < path.size(); ++f) {
    const FactorFront& front = factor_.fronts[f];
    const std::span<const Index> children = tree.children(static_cast<Index>(f));
    Index from_children = 0;
    for (const Index child : children)
      from_children = std::max(from_children, path[static_cast<std::size_t>(child)]);
    const Index tiles = front.pivots / kSolveTile + 2;
    path[f] = std::max(from_children + static_cast<Index>(children.size()), kSolveTile + 2) + tiles;
    const Index backward = kSolveRows + front.order / kSolveRows + kSolveTile + tiles + 4;
    longest_path_ = std::max({longest_path_, path[f] + kSolveTile + 4, backward});
  }
}

void BlockSolver::forward_front(Index number, double* block, Scratch& scratch, ThreadPool* team) {
  const FactorFront& front = factor_.fronts[static_cast<std::size_t>(number)];
  const Index p = front.pivots, m = front.order;
  scratch.local.assign(static_cast<std::size_t>(m) * kV, 0.0);
  for (Index i = 0; i < m; ++i) scratch.local_of[static_cast<std::size_t>(front.position[i])] = i;
  double* x = scratch.local.data();
  for (const Index child : analysis_.tree.children(number)) {
    const FactorFront& below = factor_.fronts[static_cast<std::size_t>(child)];
    auto& sums = passed_up_[static_cast<std::size_t>(child)];
    for (Index i = below.pivots; i < below.order; ++i) {
      double* to = x + Offset{scratch.local_of[static_cast<std::size_t>(below.position[i])]} * kV;
      const double* from = sums.data() + Offset{i - below.pivots} * kV;
      for (Index v = 0; v < kV; ++v) to[v] += from[v];
    }
    std::vector<double>().swap(sums);
  }
  // Rows hold sums of l_ik x_k so far; a pivot's row becomes its right-hand side minus that sum.
  front.with_lower([&](const auto* entries) {
    for (Index begin = 0; begin < p; begin += kSolveTile) {
      const Index end = std::min(begin + kSolveTile, p);
      for (Index k = begin; k < end; ++k) {
        const double* right = block + Offset{front.position[k]} * kV;
        double* own = x + Offset{k} * kV;
        for (Index v = 0; v < kV; ++v) own[v] = right[v] - own[v];
      }
      block_kernels().panel(entries).solve_triangle(entries + Offset{begin} * m + begin, m, end - begin,
                                                    x + Offset{begin} * kV);
      for_each_piece(team, (m - end + kSolveRows - 1) / kSolveRows, [&](Offset piece) {
        const Index row = end + static_cast<Index>(piece) * kSolveRows;
        block_kernels().panel(entries).times_block(entries + Offset{begin} * m + row, m,
                                                   std::min(kSolveRows, m - row), end - begin,
                                                   x + Offset{begin} * kV, x + Offset{row} * kV);
      });
    }
  });
  for (Index k = 0; k < p; ++k) std::copy_n(x + Offset{k} * kV, kV, block + Offset{front.position[k]} * kV);
  passed_up_[static_cast<std::size_t>(number)].assign(x + Offset{p} * kV, x + Offset{m} * kV);
}

void BlockSolver::backward_front(Index number, double* block, Scratch& scratch, ThreadPool* team) {
  const FactorFront& front = factor_.fronts[static_cast<std::size_t>(number)];
  const Index p = front.pivots, m = front.order;
  // Layout: the front's rows, then one sum a pivot.
  scratch.local.assign(static_cast<std::size_t>(m + p) * kV, 0.0);
  double* x = scratch.local.data();
  double* sums = x + Offset{m} * kV;
  for (Index i = 0; i < m; ++i) std::copy_n(block + Offset{front.position[i]} * kV, kV, x + Offset{i} * kV);
  front.with_lower([&](const auto* entries) {
    const auto add_rows = [&](Index row_begin, Index row_end, Index column_begin, Index column_end) {
      const Index tiles = (column_end - column_begin + kSolveTile - 1) / kSolveTile;
      for_each_piece(team, tiles, [&](Offset tile) {
        const Index begin = column_begin + static_cast<Index>(tile) * kSolveTile;
        const Index end = std::min(begin + kSolveTile, column_end);
        for (Index row = row_begin; row < row_end; row += kSolveRows) {
          block_kernels().panel(entries).transposed_times_block(
              entries + Offset{begin} * m + row, m, std::min(kSolveRows, row_end - row), end - begin,
              x + Offset{row} * kV, sums + Offset{begin} * kV);
        }
      });
    };
    add_rows(p, m, 0, p);
    const Index tiles = (p + kSolveTile - 1) / kSolveTile;
    for (Index tile = tiles; tile-- > 0;) {
      const Index begin = tile * kSolveTile, end = std::min(begin + kSolveTile, p);
      block_kernels().panel(entries).solve_transposed_triangle(entries + Offset{begin} * m + begin, m,
                                                               end - begin, sums + Offset{begin} * kV,
                                                               x + Offset{begin} * kV);
      if (begin > 0) add_rows(begin, end, 0, begin);
    }
  });
  for (Index k = 0; k < p; ++k) std::copy_n(x + Offset{k} * kV, kV, block + Offset{front.position[k]} * kV);
}

void BlockSolver::forward(double* block) {
  const Schedule& schedule = analysis_.schedule;
  std::vector<Scratch> scratch(static_cast<std::size_t>(pool_.size()));
  for (Scratch& one : scratch) one.local_of.resize(static_cast<std::size_t>(factor_.rows));
  pool_.run(static_cast<Offset>(schedule.subtrees.size()), [&](Offset piece, int worker) {
    const Subtree& subtree = schedule.subtrees[static_cast<std::size_t>(piece)];
    for (Index f = subtree.first; f < subtree.end; ++f) {
      forward_front(f, block, scratch[static_cast<std::size_t>(worker)], nullptr);
    }
  });
  for (const Index f : schedule.shared_fronts) forward_front(f, block, scratch[0], &pool_);
}

void BlockSolver::backward(double* block) {
  const Schedule& schedule = analysis_.schedule;
  std::vector<Scratch> scratch(static_cast<std::size_t>(pool_.size()));
  for (std::size_t k = schedule.shared_fronts.size(); k-- > 0;) {
    backward_front(schedule.shared_fronts[k], block, scratch[0], &pool_);
  }
  pool_.run(static_cast<Offset>(schedule.subtrees.size()), [&](Offset piece, int worker) {
    const Subtree& subtree = schedule.subtrees[static_cast<std::size_t>(piece)];
    for (Index f = subtree.end; f-- > subtree.first;) {
      backward_front(f, block, scratch[static_cast<std::size_t>(worker)], nullptr);
    }
  });
}

}  // namespace stanchion
