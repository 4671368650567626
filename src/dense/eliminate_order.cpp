// Interchanges of candidates, and the order in which those that failed are tried again.
#include <algorithm>
#include <cmath>

#include "dense/eliminate.hpp"

namespace stanchion {

template <class Scalar>
void swap_symmetric(const FrontOf<Scalar>& front, Index i, Index j, Index first_kept_column) {
  if (i == j) return;
  if (i > j) std::swap(i, j);
  const BlockLowerOf<Scalar>& m = front.matrix;
  for (Index k = first_kept_column; k < i; ++k) std::swap(m.at(i, k), m.at(j, k));
  std::swap(m.at(i, i), m.at(j, j));
  for (Index k = i + 1; k < j; ++k) std::swap(m.at(k, i), m.at(j, k));
  for (Index k = j + 1; k < m.layout.order; ++k) std::swap(m.at(k, i), m.at(k, j));
  std::swap(front.label[i], front.label[j]);
  std::swap(front.row_error[i], front.row_error[j]);
  std::swap(front.growth[i], front.growth[j]);
  if (front.fault.sign == nullptr) return;
  for (Scalar* values : {front.fault.sign, front.fault.image, front.fault.error})
    std::swap(values[i], values[j]);
}

template <class Scalar>
PairedCandidates pair_up(const FrontOf<Scalar>& front, Index from, double threshold,
                         Index first_kept_column) {
  const double limit = 1 / threshold;
  const auto entry = [&front](Index i, Index j) {
    return std::fabs(i >= j ? front.matrix.at(i, j) : front.matrix.at(j, i));
  };
  PairedCandidates paired{front.candidates, false};
  for (Index j = from; j < paired.end;) {
    Scalar largest = 0, candidate = 0;
    Index partner = -1;
    for (Index i = from; i < front.matrix.layout.order; ++i) {
      if (i == j) continue;
      const Scalar size = entry(i, j);
      largest = std::max(largest, size);
      if (i > j && i < paired.end && size > candidate) {
        candidate = size;
        partner = i;
      }
    }
    if (entry(j, j) > 0 && largest <= limit * entry(j, j)) {
      ++j;
    } else if (partner >= 0 && largest <= limit * candidate) {
      swap_symmetric(front, j + 1, partner, first_kept_column);
      j += 2;
    } else {
      paired.zero_columns = paired.zero_columns || (largest == 0 && entry(j, j) == 0);
      swap_symmetric(front, j, --paired.end, first_kept_column);
    }
  }
  return paired;
}

template void swap_symmetric(const FrontOf<double>&, Index, Index, Index);
template void swap_symmetric(const FrontOf<float>&, Index, Index, Index);
template PairedCandidates pair_up(const FrontOf<double>&, Index, double, Index);
template PairedCandidates pair_up(const FrontOf<float>&, Index, double, Index);

}  // namespace stanchion
