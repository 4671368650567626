// The motions that constraints with multipliers leave: B x = 0, in the rows of [K B^T; B 0] beside the
// multipliers.
#pragma once

#include <vector>

#include "diagnose/columns.hpp"
#include "diagnose/structure.hpp"
#include "sparse/matrix_family.hpp"

namespace stanchion {

class ConstraintSpace {
 public:
  /// Takes the constraint rows out of `matrix`. Cost: one pass over the entries.
  ConstraintSpace(const Structure& structure, const ShiftedMatrix& matrix);

  /// x := the nearest x with B x = 0 and multipliers at zero: x - B^T (B B^T)^+ B x, by conjugate gradients
  /// on B B^T with unit rows (Hestenes and Stiefel, J. Res. NBS 49 (1952)), twice. Constraints that repeat
  /// others do no harm.
  void project(Columns& x) const;

 private:
  /// One entry of B, in unit rows.
  struct Entry {
    Index multiplier, row;
    double value;
  };
  std::vector<double> times_b(const Columns& x) const;
  void subtract_transposed(const std::vector<double>& mu, Columns& x) const;
  std::vector<double> times_gram(const std::vector<double>& mu, Index count) const;

  Index rows_;
  std::vector<Index> multipliers_;  ///< positions
  std::vector<Entry> entries_;      ///< by multiplier
};

}  // namespace stanchion
