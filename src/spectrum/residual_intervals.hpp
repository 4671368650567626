// Rigorous intervals for eigenvalues of C x = theta B x, B definite, from approximate vectors and their
// residuals.
#pragma once

#include <vector>

#include "base/long_vector.hpp"
#include "numeric/extended_product.hpp"
#include "spectrum/definite_base.hpp"

namespace stanchion {

/// One approximate vector, held in the energy coordinates of the base, and what its residual shows: an
/// eigenvalue lies within `radius` of `theta`.
struct ResidualPair {
  double theta = 0, radius = 0;
  double norm =
      0;  ///< of the coordinates, so that x / norm has unit energy but for the base's relative error
  double residual = 0;              ///< bound on the energy norm of the residual, for vectors of any norm
  double floor = 0;                 ///< bound on M^-1 r less `residual_coordinates`
  double length = 0;                ///< of x itself
  std::vector<double> coordinates;  ///< y of x = M^-T y
  std::vector<double> residual_coordinates;  ///< M^-1 r as computed, r = C x - theta B x
  std::vector<double> vector;                ///< x, in elimination order, of the scaled matrix, where asked
};

/// B and C of a pencil with what residuals of many pairs need again and again: their sizes, and memory for
/// eight vectors at a time. `base` and what `second` refers to outlive the object. Cost: a pass over each
/// matrix; memory: eight blocks of eight vectors.
class ResidualWork {
 public:
  /// `keep_vectors`: whether pairs hold their vectors.
  ResidualWork(DefiniteBase& base, const ShiftedMatrix& second, bool keep_vectors);

  /// Pairs from `coordinates`, a block of approximate eigenvectors of M^-1 C M^-T (the first `count` columns;
  /// the others are not looked at). theta is the Rayleigh quotient. Products with the data are extended,
  /// every rounding is in the radius. Cost: two products and two passes over L.
  std::vector<ResidualPair> pairs(const std::vector<double>& coordinates, Index count);

  /// Better coordinates from `pairs`: one step of inverse iteration on the residual, Rayleigh and Ritz among
  /// them; the values of the pairs must be nonzero and the pairs those of the largest values in size. Cost:
  /// as pairs(), for every eight.
  std::vector<std::vector<double>> refined_coordinates(const std::vector<ResidualPair>& pairs);

 private:
  /// bx_ := B block and cx_ := C block.
  void multiply(const double* block);

  DefiniteBase& base_;
  const ShiftedMatrix& second_;
  bool keep_vectors_;
  AbsoluteNorm base_size_, second_size_;
  Buffer<double> product_memory_;
  LongVector<double> x_, bx_, cx_;
};

/// Bound on ||X^T B X - I|| for the vectors `members` of `pairs`, each divided by its norm.
double gram_defect(const DefiniteBase& base, const std::vector<ResidualPair>& pairs,
                   const std::vector<std::size_t>& members);

/// An interval that certainly holds at least `pairs.size()` eigenvalues, counted with multiplicity.
struct EigenvalueGroup {
  double low = 0, high = 0;        ///< of theta, low <= high
  std::vector<std::size_t> pairs;  ///< numbers in the list given, by theta ascending
};

/// Groups with disjoint intervals, ascending, so that different groups hold different eigenvalues: pairs
/// whose intervals overlap are taken together, by the theorem of Kahan on invariant subspaces. Pairs that
/// show nothing (an infinite radius, or coordinates that depend on each other) are left out.
std::vector<EigenvalueGroup> disjoint_groups(const DefiniteBase& base,
                                             const std::vector<ResidualPair>& pairs);

/// Sharper intervals once it is certain that the eigenvalues between `below` and `above` (either may be
/// infinite) are those of `groups`, as many as their pairs: ascending, disjoint, inside. The error of a group
/// falls with the square of its residuals over its distance from what is beside it (residual_bound.md, 4).
void sharpen(const DefiniteBase& base, const std::vector<ResidualPair>& pairs, double below, double above,
             std::vector<EigenvalueGroup>& groups);

}  // namespace stanchion
