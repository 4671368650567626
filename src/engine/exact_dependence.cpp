#include "engine/exact_dependence.hpp"

#include <algorithm>
#include <cmath>

namespace stanchion {
namespace {

/// Products within have no error below the smallest double, and sums of them none above the largest.
constexpr double kNoUnderflow = 0x1p-900, kNoOverflow = 0x1p900;

/// A sum of doubles without rounding: components that do not overlap.
class ExactSum {
 public:
  void add(double value) {
    std::size_t kept = 0;
    for (const double part : parts_) {
      const double sum = value + part;
      const double of_part = sum - value;
      const double error = (value - (sum - of_part)) + (part - of_part);
      if (error != 0) parts_[kept++] = error;
      value = sum;
    }
    parts_.resize(kept);
    if (value != 0) parts_.push_back(value);
  }
  /// Components that do not overlap cancel only where there is none.
  bool is_zero() const { return parts_.empty(); }

 private:
  std::vector<double> parts_;
};

bool far_from_limits(double value) {
  const double size = std::fabs(value);
  return size > kNoUnderflow && size < kNoOverflow;
}

/// value / by, where that is a double exactly; 0 where it is not, or where it cannot be told.
double exact_quotient(double value, double by) {
  const double quotient = value / by;
  const bool exact = far_from_limits(value) && far_from_limits(by) && far_from_limits(quotient) &&
                     std::fma(quotient, by, -value) == 0;
  return exact ? quotient : 0;
}

/// A multiple of `vector` without any rounding, so that simple multiples of one another become simple again:
/// divided by its largest entry (a tie becomes 1 and -1), else by a power of two near that.
SparseColumn simple_multiple(const SparseColumn& vector) {
  double largest = 0;
  for (const SparseEntry& entry : vector) {
    if (std::fabs(entry.value) > std::fabs(largest)) largest = entry.value;
  }
  for (const double by : {largest, std::ldexp(1.0, std::ilogb(largest))}) {
    SparseColumn multiple = vector;
    bool exact = true;
    for (SparseEntry& entry : multiple) exact &= (entry.value = exact_quotient(entry.value, by)) != 0;
    if (exact) return multiple;
  }
  return vector;
}

}  // namespace

bool vanishes_exactly(const std::vector<SparseColumn>& vectors, const SparseColumn& combination) {
  struct Term {
    Index at;
    double product, error;
  };
  std::vector<Term> terms;
  for (const SparseEntry& part : combination) {
    for (const SparseEntry& entry : vectors[static_cast<std::size_t>(part.at)]) {
      const double product = part.value * entry.value;
      if (!far_from_limits(product)) return false;
      terms.push_back({entry.at, product, std::fma(part.value, entry.value, -product)});
    }
  }
  std::stable_sort(terms.begin(), terms.end(), [](const Term& a, const Term& b) { return a.at < b.at; });
  for (std::size_t begin = 0; begin < terms.size();) {
    ExactSum sum;
    std::size_t end = begin;
    for (; end < terms.size() && terms[end].at == terms[begin].at; ++end) {
      sum.add(terms[end].product);
      sum.add(terms[end].error);
    }
    if (!sum.is_zero()) return false;
    begin = end;
  }
  return true;
}

std::vector<char> exactly_dependent(const std::vector<SparseColumn>& vectors, Index rows, Offset most_steps) {
  std::vector<SparseColumn> simple;
  for (const SparseColumn& vector : vectors) simple.push_back(simple_multiple(vector));
  std::vector<char> dependent(vectors.size(), 0);
  // Every combination is made of vectors with a pivot and one that has none, with coefficient 1.
  for (const SparseColumn& combination : dependent_columns(simple, rows, most_steps)) {
    if (vanishes_exactly(simple, combination)) dependent[static_cast<std::size_t>(combination.back().at)] = 1;
  }
  return dependent;
}

}  // namespace stanchion
