#include "diagnose/repeated_constraints.hpp"

#include <algorithm>
#include <cmath>
#include <span>
#include <utility>

#include "diagnose/dependent_constraints.hpp"

namespace stanchion {
namespace {

/// Columns are in proportion when their entries, over the first of each, agree to so much of the whole.
constexpr double kSteps = 0x1p40;
constexpr std::size_t kMostTogether = 64;

/// One column of the multipliers, by row.
struct Column {
  Index row = 0;  ///< the multiplier
  std::size_t begin = 0, end = 0;
};

class Finder {
 public:
  Finder(const Structure& structure, const ShiftedMatrix& matrix) : s_(structure), matrix_(matrix) {}

  std::vector<RepeatedConstraint> run(const std::vector<NodeMotion>& motions) {
    choose_rows(motions);
    if (columns_.size() < 2) return {};
    gather();
    std::sort(columns_.begin(), columns_.end(), [this](const Column& a, const Column& b) {
      const int order = compare(a, b);
      return order != 0 ? order < 0 : a.row < b.row;
    });
    for (std::size_t begin = 0; begin < columns_.size();) {
      std::size_t end = begin + 1;
      while (end < columns_.size() && end - begin < kMostTogether &&
             compare(columns_[begin], columns_[end]) == 0)
        ++end;
      const auto group = std::span(columns_).subspan(begin, end - begin);
      if (group.size() > 1) add_group(group);
      distinct_.push_back(as_one(group));
      begin = end;
    }
    for (RepeatedConstraint& one : find_dependent_constraints(std::move(distinct_), s_.rows))
      found_.push_back(std::move(one));
    return std::move(found_);
  }

 private:
  struct Entry {
    Index row;
    double value;
    double share;  ///< of the first entry, in whole steps
  };

  void choose_rows(const std::vector<NodeMotion>& motions) {
    std::vector<char> moves(static_cast<std::size_t>(s_.rows), 0);
    for (const NodeMotion& motion : motions) {
      for (const Index row : s_.rows_of(motion.node)) moves[static_cast<std::size_t>(row)] = 1;
    }
    column_of_.assign(static_cast<std::size_t>(s_.rows), -1);
    for (Index row = 0; row < s_.rows; ++row) {
      const auto i = static_cast<std::size_t>(row);
      if (s_.diagonal[i] != 0 || s_.empty[i] || moves[i]) continue;
      column_of_[i] = static_cast<Index>(columns_.size());
      columns_.push_back({row, 0, 0});
    }
  }

  template <class Add>
  void each_entry(const Add& add) const {
    const MatrixFamily& family = *matrix_.family;
    for (Index j = 0; j < family.rows; ++j) {
      const Index of_j = column_of_[static_cast<std::size_t>(j)];
      for (Offset k = family.column_start[j]; k < family.column_start[Offset{j} + 1]; ++k) {
        const Index i = family.row[k], of_i = column_of_[static_cast<std::size_t>(i)];
        if (of_i < 0 && of_j < 0) continue;
        const double value = matrix_.entry(k, i, j);
        if (value == 0) continue;
        if (of_j >= 0) add(of_j, i, value);
        if (of_i >= 0 && i != j) add(of_i, j, value);
      }
    }
  }

  void gather() {
    each_entry([this](Index column, Index, double) { ++columns_[static_cast<std::size_t>(column)].end; });
    std::size_t total = 0;
    for (Column& column : columns_) {
      const std::size_t length = column.end;
      column.begin = column.end = total;
      total += length;
    }
    entries_.resize(total);
    each_entry([this](Index column, Index row, double value) {
      entries_[columns_[static_cast<std::size_t>(column)].end++] = {row, value, 0};
    });
    for (const Column& column : columns_) {
      const auto begin = entries_.begin() + static_cast<std::ptrdiff_t>(column.begin);
      const auto end = entries_.begin() + static_cast<std::ptrdiff_t>(column.end);
      std::sort(begin, end, [](const Entry& a, const Entry& b) { return a.row < b.row; });
      for (auto entry = begin; entry != end; ++entry)
        entry->share = std::nearbyint(entry->value / begin->value * kSteps);
    }
  }

  std::span<const Entry> entries_of(const Column& column) const {
    return std::span(entries_).subspan(column.begin, column.end - column.begin);
  }

  /// Below, at or above 0; 0 for columns in proportion.
  int compare(const Column& a, const Column& b) const {
    const auto x = entries_of(a), y = entries_of(b);
    if (x.size() != y.size()) return x.size() < y.size() ? -1 : 1;
    for (std::size_t k = 0; k < x.size(); ++k) {
      if (x[k].row != y[k].row) return x[k].row < y[k].row ? -1 : 1;
    }
    for (std::size_t k = 0; k < x.size(); ++k) {
      if (x[k].share != y[k].share) return x[k].share < y[k].share ? -1 : 1;
    }
    return 0;
  }

  /// With columns c_j u the vectors orthogonal to c: the k-th of them on the first k + 1 multipliers.
  void add_group(std::span<const Column> group) {
    std::vector<Index> rows;
    std::vector<double> size;
    for (const Column& column : group) {
      rows.push_back(column.row);
      size.push_back(entries_of(column).front().value);
    }
    double before = size[0] * size[0];
    for (std::size_t k = 1; k < group.size(); ++k) {
      const double with = before + size[k] * size[k], scale = std::sqrt(before) * std::sqrt(with);
      RepeatedConstraint found{rows, std::vector<double>(group.size(), 0.0)};
      for (std::size_t j = 0; j < k; ++j) found.entry[j] = -size[j] * (size[k] / scale);
      found.entry[k] = before / scale;
      before = with;
      found.residual = residual(group, found.entry);
      if (found.residual <= kLocalMotionLimit) found_.push_back(std::move(found));
    }
  }

  /// With columns c_j u: the weights c_j over their length, orthogonal to the vectors of the group.
  DistinctConstraint as_one(std::span<const Column> group) const {
    DistinctConstraint one;
    double sum = 0;
    for (const Column& column : group) {
      const double size = entries_of(column).front().value;
      one.rows.push_back(column.row);
      one.weight.push_back(size);
      sum += size * size;
    }
    const double length = std::sqrt(sum);
    for (double& weight : one.weight) weight /= length;
    const auto entries = entries_of(group.front());
    for (const Entry& entry : entries)
      one.column.push_back({entry.row, entry.value / entries.front().value * length});
    return one;
  }

  double residual(std::span<const Column> group, const std::vector<double>& entry) const {
    double most = 0;
    for (std::size_t k = 0; k < entries_of(group.front()).size(); ++k) {
      double sum = 0;
      for (std::size_t j = 0; j < group.size(); ++j) sum += entry[j] * entries_of(group[j])[k].value;
      most = std::max(most, std::fabs(sum));
    }
    return most;
  }

  const Structure& s_;
  const ShiftedMatrix& matrix_;
  std::vector<Index> column_of_;  ///< position -> place in columns_ before they are sorted, or -1
  std::vector<Column> columns_;
  std::vector<Entry> entries_;
  std::vector<DistinctConstraint> distinct_;
  std::vector<RepeatedConstraint> found_;
};

}  // namespace

std::vector<RepeatedConstraint> find_repeated_constraints(const Structure& structure,
                                                          const ShiftedMatrix& matrix,
                                                          const std::vector<NodeMotion>& motions) {
  return Finder(structure, matrix).run(motions);
}

}  // namespace stanchion
