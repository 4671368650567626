#include "diagnose/dependent_constraints.hpp"

#include <algorithm>
#include <cmath>
#include <map>
#include <numeric>

#include "diagnose/subspace.hpp"

namespace stanchion {
namespace {

constexpr Offset kMostSteps = 100'000'000;  ///< of the elimination: some tenths of a second
constexpr Offset kMostEntries = 3'000'000;  ///< of the vectors of all linked constraints together
constexpr double kNegligible = 1e-17;       ///< entry of a unit vector

class Dependence {
 public:
  Dependence(std::vector<DistinctConstraint> constraints, Index rows)
      : constraints_(std::move(constraints)), image_(static_cast<std::size_t>(rows), 0.0) {}

  std::vector<RepeatedConstraint> run() {
    const std::vector<double> size = make_unit();
    combinations_ = dependent_columns(columns_, static_cast<Index>(image_.size()), kMostSteps);
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

  /// Orthonormal vectors on the multipliers of one linked set.
  void add_linked(const std::vector<const SparseColumn*>& combinations) {
    std::map<Index, double> on_row;  // multiplier -> its weight, then its place
    for (const SparseColumn* one : combinations) {
      for (const SparseEntry& entry : *one) {
        const DistinctConstraint& constraint = constraints_[static_cast<std::size_t>(entry.at)];
        for (const Index row : constraint.rows) on_row[row] = 0;
      }
    }
    std::vector<Index> rows;
    std::map<Index, Index> place;
    for (const auto& [row, unused] : on_row) {
      place[row] = static_cast<Index>(rows.size());
      rows.push_back(row);
    }
    const Offset room = entries_left_ / static_cast<Offset>(rows.size());
    const auto many = static_cast<Index>(std::min<Offset>(room, static_cast<Offset>(combinations.size())));
    if (many == 0) return;
    entries_left_ -= Offset{many} * static_cast<Offset>(rows.size());
    Columns x(static_cast<Index>(rows.size()), whole_blocks(many));
    for (Index c = 0; c < many; ++c) {
      for (const SparseEntry& entry : *combinations[static_cast<std::size_t>(c)]) {
        const DistinctConstraint& constraint = constraints_[static_cast<std::size_t>(entry.at)];
        for (std::size_t k = 0; k < constraint.rows.size(); ++k)
          x.row(place[constraint.rows[k]])[c] += entry.value * constraint.weight[k];
      }
    }
    std::vector<Index> all(rows.size());
    std::iota(all.begin(), all.end(), 0);
    const Index used = orthonormalise(x, all);
    for (Index c = 0; c < used; ++c) add(rows, x, c);
  }

  void add(const std::vector<Index>& rows, const Columns& x, Index column) {
    RepeatedConstraint found;
    found.in_proportion = false;
    for (std::size_t i = 0; i < rows.size(); ++i) {
      const double value = x.row(static_cast<Index>(i))[column];
      if (std::fabs(value) <= kNegligible) continue;
      found.rows.push_back(rows[i]);
      found.entry.push_back(value);
    }
    found.residual = residual(found);
    if (found.residual <= kLocalMotionLimit) found_.push_back(std::move(found));
  }

  double residual(const RepeatedConstraint& vector) {
    if (constraint_of_.empty()) {
      for (std::size_t g = 0; g < constraints_.size(); ++g) {
        for (std::size_t k = 0; k < constraints_[g].rows.size(); ++k)
          constraint_of_[constraints_[g].rows[k]] = {g, k};
      }
    }
    // Within a constraint the entries are in proportion to its weights: their sum along those is what acts.
    std::vector<Index> touched;
    for (std::size_t i = 0; i < vector.rows.size(); ++i) {
      const auto& [g, k] = constraint_of_.at(vector.rows[i]);
      const double along = vector.entry[i] * constraints_[g].weight[k];
      for (const SparseEntry& entry : constraints_[g].column) {
        image_[static_cast<std::size_t>(entry.at)] += along * entry.value;
        touched.push_back(entry.at);
      }
    }
    double most = 0;
    for (const Index row : touched) most = std::max(most, std::fabs(image_[static_cast<std::size_t>(row)]));
    for (const Index row : touched) image_[static_cast<std::size_t>(row)] = 0;
    return most;
  }

  std::vector<DistinctConstraint> constraints_;
  std::vector<SparseColumn> columns_, combinations_;
  std::vector<double> image_;
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
  // The vectors, a copy while they are made orthogonal, and the result with its rows.
  constexpr Offset kBytes = 2 * sizeof(double) + sizeof(double) + sizeof(Index);
  return std::min(kMostEntries, Offset{rows} * zero) * kBytes;
}

}  // namespace stanchion
