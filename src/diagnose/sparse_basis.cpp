#include "diagnose/sparse_basis.hpp"

#include <algorithm>
#include <cmath>

#include "diagnose/distinct.hpp"
#include "diagnose/scattered.hpp"

namespace stanchion {
namespace {

constexpr double kIndependent = 1e-11;  ///< left of a vector without its parts along earlier ones

class SparseBasis {
 public:
  SparseBasis(Index rows, Offset most_steps, Offset most_entries)
      : steps_left_(most_steps),
        entries_left_(most_entries),
        meets_(static_cast<std::size_t>(rows)),
        sum_(rows) {}

  bool full() const { return steps_left_ <= 0 || entries_left_ <= 0; }

  void take(const SparseColumn& vector) {
    for (const SparseEntry& entry : vector) sum_.add(entry.at, entry.value);
    const double before = length();
    for (int pass = 0; pass < 2; ++pass) subtract_earlier();
    const double left = length();
    if (left > kIndependent * before && !full()) keep(left);
    sum_.clear();
  }

  std::vector<SparseColumn> done() { return std::move(basis_); }

 private:
  double length() const {
    double sum = 0;
    for (const Index at : sum_.places()) sum += sum_.at(at) * sum_.at(at);
    return std::sqrt(sum);
  }

  void subtract_earlier() {
    std::vector<Index> earlier;
    for (const Index at : sum_.places()) {
      const auto& here = meets_[static_cast<std::size_t>(at)];
      earlier.insert(earlier.end(), here.begin(), here.end());
    }
    make_distinct(earlier);
    for (const Index one : earlier) {
      const SparseColumn& q = basis_[static_cast<std::size_t>(one)];
      double along = 0;
      for (const SparseEntry& entry : q) along += entry.value * sum_.at(entry.at);
      steps_left_ -= static_cast<Offset>(q.size());
      if (along == 0) continue;
      for (const SparseEntry& entry : q) sum_.add(entry.at, -along * entry.value);
    }
  }

  void keep(double size) {
    SparseColumn q;
    std::vector<Index> places = sum_.places();
    std::sort(places.begin(), places.end());
    for (const Index at : places) {
      const double value = sum_.at(at) / size;
      if (std::fabs(value) <= kNegligible) continue;
      q.push_back({at, value});
      meets_[static_cast<std::size_t>(at)].push_back(static_cast<Index>(basis_.size()));
    }
    entries_left_ -= static_cast<Offset>(q.size());
    basis_.push_back(std::move(q));
  }

  Offset steps_left_, entries_left_;
  std::vector<std::vector<Index>> meets_;  ///< by row: the vectors that have an entry there
  Scattered sum_;
  std::vector<SparseColumn> basis_;
};

}  // namespace

std::vector<SparseColumn> sparse_orthonormal(const std::vector<SparseColumn>& vectors, Index rows,
                                             Offset most_steps, Offset most_entries) {
  SparseBasis basis(rows, most_steps, most_entries);
  for (const SparseColumn& vector : vectors) {
    if (basis.full()) break;
    basis.take(vector);
  }
  return basis.done();
}

}  // namespace stanchion
