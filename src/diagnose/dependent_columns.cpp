#include "diagnose/dependent_columns.hpp"

#include <algorithm>
#include <cmath>
#include <functional>
#include <queue>
#include <utility>

#include "diagnose/scattered.hpp"

namespace stanchion {
namespace {

constexpr double kVanishes = 0x1p-40;  ///< of the largest number met on the way

/// Columns C = L U with L of unit pivots: C_k is the sum over p of U(p, k) L_p, and U(k, k) L_k where it does
/// not vanish.
class Elimination {
 public:
  Elimination(const std::vector<SparseColumn>& columns, Index rows, Offset most_steps)
      : columns_(columns),
        steps_left_(most_steps),
        pivot_of_(static_cast<std::size_t>(rows), -1),
        work_(rows),
        combination_(static_cast<Index>(columns.size())) {}

  std::vector<SparseColumn> run() {
    lower_.resize(columns_.size());
    upper_.resize(columns_.size());
    diagonal_.assign(columns_.size(), 0);
    for (Index k = 0; k < static_cast<Index>(columns_.size()) && steps_left_ > 0; ++k) {
      reduce(k);
      if (!take_pivot(k)) {
        SparseColumn found = combination(k);
        if (!found.empty()) found_.push_back(std::move(found));
      }
      work_.clear();
    }
    return std::move(found_);
  }

 private:
  SparseColumn& lower(Index k) { return lower_[static_cast<std::size_t>(k)]; }
  SparseColumn& upper(Index k) { return upper_[static_cast<std::size_t>(k)]; }

  /// Takes from column k its parts along the earlier pivots, in their order.
  void reduce(Index k) {
    std::priority_queue<Index, std::vector<Index>, std::greater<>> pivots;
    const auto add = [&](Index row, double value) {
      if (work_.add(row, value) && pivot_of_[static_cast<std::size_t>(row)] >= 0)
        pivots.push(pivot_of_[static_cast<std::size_t>(row)]);
    };
    most_ = 0;
    for (const SparseEntry& entry : columns_[static_cast<std::size_t>(k)]) {
      add(entry.at, entry.value);
      most_ = std::max(most_, std::fabs(entry.value));
    }
    while (!pivots.empty() && steps_left_ > 0) {
      const Index p = pivots.top();
      pivots.pop();
      const double along = work_.at(lower(p).front().at);
      if (along == 0) continue;
      upper(k).push_back({p, along});
      most_ = std::max(most_, std::fabs(along));  // no entry of L exceeds 1
      steps_left_ -= static_cast<Offset>(lower(p).size());
      for (std::size_t e = 1; e < lower(p).size(); ++e) add(lower(p)[e].at, -along * lower(p)[e].value);
    }
  }

  /// The largest entry that is left, first in its column of L; false where all vanish.
  bool take_pivot(Index k) {
    Index pivot = -1;
    double largest = kVanishes * most_;
    for (const Index row : work_.places()) {
      if (pivot_of_[static_cast<std::size_t>(row)] >= 0) continue;
      const double size = std::fabs(work_.at(row));
      if (!(size > largest)) continue;
      largest = size;
      pivot = row;
    }
    if (pivot < 0) return false;
    const double d = diagonal_[static_cast<std::size_t>(k)] = work_.at(pivot);
    lower(k).push_back({pivot, 1});
    for (const Index row : work_.places()) {
      if (row == pivot || pivot_of_[static_cast<std::size_t>(row)] >= 0 || work_.at(row) == 0) continue;
      lower(k).push_back({row, work_.at(row) / d});
    }
    pivot_of_[static_cast<std::size_t>(pivot)] = k;
    return true;
  }

  /// Back substitution: the coefficients of the columns instead of those of L.
  SparseColumn combination(Index k) {
    std::priority_queue<Index> open;
    const auto add = [&](Index column, double value) {
      if (combination_.add(column, value)) open.push(column);
    };
    for (const SparseEntry& entry : upper(k)) add(entry.at, -entry.value);
    SparseColumn result{{k, 1}};
    while (!open.empty() && steps_left_ > 0) {
      const Index p = open.top();
      open.pop();
      const double coefficient = combination_.at(p) / diagonal_[static_cast<std::size_t>(p)];
      if (coefficient == 0) continue;
      result.push_back({p, coefficient});
      steps_left_ -= static_cast<Offset>(upper(p).size()) + 1;
      for (const SparseEntry& entry : upper(p)) add(entry.at, -entry.value * coefficient);
    }
    combination_.clear();
    std::reverse(result.begin(), result.end());
    return steps_left_ > 0 ? result : SparseColumn();
  }

  const std::vector<SparseColumn>& columns_;
  Offset steps_left_;
  std::vector<Index> pivot_of_;  ///< row -> the column that has its pivot there, or -1
  std::vector<SparseColumn> lower_, upper_;
  std::vector<double> diagonal_;
  Scattered work_, combination_;
  double most_ = 0;
  std::vector<SparseColumn> found_;
};

}  // namespace

std::vector<SparseColumn> dependent_columns(const std::vector<SparseColumn>& columns, Index rows,
                                            Offset most_steps) {
  return Elimination(columns, rows, most_steps).run();
}

}  // namespace stanchion
