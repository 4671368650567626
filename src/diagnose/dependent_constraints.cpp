#include "diagnose/dependent_constraints.hpp"

#include <algorithm>
#include <cmath>
#include <map>
#include <numeric>

#include "diagnose/scattered.hpp"
#include "diagnose/sparse_basis.hpp"
#include "diagnose/subspace.hpp"

namespace stanchion {
namespace {

constexpr Offset kMostEntries = 3'000'000;  ///< of all vectors together
constexpr Offset kMostDense = 2'500'000;    ///< of one set while it is made orthonormal by blocks

class Dependence {
 public:
  Dependence(std::vector<DistinctConstraint> constraints, Index rows)
      : constraints_(std::move(constraints)), image_(rows) {}

  std::vector<RepeatedConstraint> run() {
    const std::vector<double> size = make_unit();
    combinations_ = dependent_columns(columns_, image_.size(), kMostDependenceSteps);
    for (SparseColumn& one : combinations_) {
      for (SparseEntry& entry : one) entry.value /= size[static_cast<std::size_t>(entry.at)];
    }
    for (const auto& [link, members] : linked()) add_linked(members);
    return std::move(found_);
  }

 private:
  std::vector<double> make_unit() {
    std::vector<double> size;
    for (const DistinctConstraint& one : constraints_) {
      double sum = 0;
      for (const SparseEntry& entry : one.column) sum += entry.value * entry.value;
      size.push_back(std::sqrt(sum));
      columns_.push_back(one.column);
      for (SparseEntry& entry : columns_.back()) entry.value /= size.back();
    }
    return size;
  }

  /// Combinations that share a constraint, directly or through others, by the first constraint of each set.
  std::map<Index, std::vector<const SparseColumn*>> linked() const {
    std::vector<Index> link(constraints_.size());
    std::iota(link.begin(), link.end(), 0);
    const auto root = [&link](Index at) {
      while (link[static_cast<std::size_t>(at)] != at)
        at = link[static_cast<std::size_t>(at)] =
            link[static_cast<std::size_t>(link[static_cast<std::size_t>(at)])];
      return at;
    };
    for (const SparseColumn& one : combinations_) {
      for (const SparseEntry& entry : one) {
        const auto [low, high] = std::minmax({root(one.front().at), root(entry.at)});
        link[static_cast<std::size_t>(high)] = low;
      }
    }
    std::map<Index, std::vector<const SparseColumn*>> sets;
    for (const SparseColumn& one : combinations_) sets[root(one.front().at)].push_back(&one);
    return sets;
  }

  /// Orthonormal vectors on the multipliers of one linked set: by blocks while few, one by one and sparse
  /// else.
  void add_linked(const std::vector<const SparseColumn*>& combinations) {
    std::map<Index, Index> place;  // multiplier -> its place among those of the set
    for (const SparseColumn* one : combinations) {
      for (const SparseEntry& entry : *one) {
        for (const Index row : constraint(entry).rows) place[row] = 0;
      }
    }
    std::vector<Index> rows;
    for (auto& [row, at] : place) {
      at = static_cast<Index>(rows.size());
      rows.push_back(row);
    }
    std::vector<SparseColumn> vectors;
    for (const SparseColumn* one : combinations) {
      vectors.emplace_back();
      for (const SparseEntry& entry : *one) {
        const DistinctConstraint& whole = constraint(entry);
        for (std::size_t k = 0; k < whole.rows.size(); ++k)
          vectors.back().push_back({place[whole.rows[k]], entry.value * whole.weight[k]});
      }
    }
    const auto n = static_cast<Index>(rows.size());
    const bool few = Offset{n} * static_cast<Offset>(vectors.size()) <= std::min(kMostDense, entries_left_);
    for (const SparseColumn& one : few ? dense_orthonormal(vectors, n)
                                       : sparse_orthonormal(vectors, n, kMostDependenceSteps, entries_left_))
      add(rows, one);
  }

  const DistinctConstraint& constraint(const SparseEntry& entry) const {
    return constraints_[static_cast<std::size_t>(entry.at)];
  }

  static std::vector<SparseColumn> dense_orthonormal(const std::vector<SparseColumn>& vectors, Index rows) {
    Columns x(rows, whole_blocks(static_cast<Index>(vectors.size())));
    for (std::size_t c = 0; c < vectors.size(); ++c) {
      for (const SparseEntry& entry : vectors[c]) x.row(entry.at)[c] += entry.value;
    }
    std::vector<Index> all(static_cast<std::size_t>(rows));
    std::iota(all.begin(), all.end(), 0);
    std::vector<SparseColumn> result(static_cast<std::size_t>(orthonormalise(x, all)));
    for (std::size_t c = 0; c < result.size(); ++c) {
      for (Index i = 0; i < rows; ++i) {
        if (std::fabs(x.row(i)[c]) > kNegligible) result[c].push_back({i, x.row(i)[c]});
      }
    }
    return result;
  }

  void add(const std::vector<Index>& rows, const SparseColumn& vector) {
    RepeatedConstraint found;
    found.in_proportion = false;
    for (const SparseEntry& entry : vector) {
      found.rows.push_back(rows[static_cast<std::size_t>(entry.at)]);
      found.entry.push_back(entry.value);
    }
    found.residual = residual(found);
    if (found.residual > kLocalMotionLimit) return;
    entries_left_ -= static_cast<Offset>(found.rows.size());
    found_.push_back(std::move(found));
  }

  double residual(const RepeatedConstraint& vector) {
    if (constraint_of_.empty()) {
      for (std::size_t g = 0; g < constraints_.size(); ++g) {
        for (std::size_t k = 0; k < constraints_[g].rows.size(); ++k)
          constraint_of_[constraints_[g].rows[k]] = {g, k};
      }
    }
    // Within a constraint the entries are in proportion to its weights: their sum along those is what acts.
    for (std::size_t i = 0; i < vector.rows.size(); ++i) {
      const auto& [g, k] = constraint_of_.at(vector.rows[i]);
      const double along = vector.entry[i] * constraints_[g].weight[k];
      for (const SparseEntry& entry : constraints_[g].column) image_.add(entry.at, along * entry.value);
    }
    double most = 0;
    for (const Index row : image_.places()) most = std::max(most, std::fabs(image_.at(row)));
    image_.clear();
    return most;
  }

  std::vector<DistinctConstraint> constraints_;
  std::vector<SparseColumn> columns_, combinations_;
  Scattered image_;  ///< of a vector, by row of A_s
  std::map<Index, std::pair<std::size_t, std::size_t>> constraint_of_;
  Offset entries_left_ = kMostEntries;
  std::vector<RepeatedConstraint> found_;
};

}  // namespace

std::vector<RepeatedConstraint> find_dependent_constraints(std::vector<DistinctConstraint> constraints,
                                                           Index rows) {
  return Dependence(std::move(constraints), rows).run();
}

Offset dependent_constraint_bytes(Index rows, Index zero) {
  // The vectors, made orthogonal, and the result with its rows.
  constexpr Offset kBytes = 2 * sizeof(SparseEntry);
  return std::min(kMostEntries, Offset{rows} * zero) * kBytes;
}

}  // namespace stanchion
