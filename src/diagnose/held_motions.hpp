// Zero directions held, each at one equation: what is left of a vector when it may not move there.
#pragma once

#include <vector>

#include "diagnose/evidence.hpp"

namespace stanchion {

/// For A positive semidefinite with null vectors N and as many equations R, N_R not singular, the oblique
/// projection P = I - N N_R^-1 E_R^T turns any generalised inverse X into the inverse of A without the rows
/// and columns R: P X P^T is zero on R and that inverse elsewhere, for A P = A and P N = 0. So the structure
/// held at R is seen through the factor of A that is there.
class HeldMotions {
 public:
  /// Holds the zero directions named in the parts marked, each where it moves most.
  HeldMotions(const Evidence& evidence, const std::vector<char>& part_wanted);

  const std::vector<Index>& rows() const { return rows_; }  ///< positions held

  /// x := P x.
  void apply(Columns& x) const;

 private:
  /// One null vector, zero at the rows held before it.
  struct Motion {
    Index held = 0;
    std::vector<Index> rows;
    std::vector<double> entry;  ///< 1 at `held`
  };
  void hold(Motion motion);
  /// A motion of a few rows. Those of a group, one after another on the same rows, are cleared of one
  /// another.
  void hold_local(Motion motion);

  std::vector<Motion> motions_;
  std::size_t group_ = 0;  ///< where the group of the last local motion begins
  std::vector<Index> rows_;
};

}  // namespace stanchion
