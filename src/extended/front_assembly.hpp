// One entry of the matrix in a scalar, with the error of forming it.
#pragma once

#include "extended/front_worker.hpp"

namespace stanchion {

template <class Scalar>
struct FormedEntry {
  Scalar value;
  double error = 0;  ///< bound on |value - exact|
};

/// Entry k of the family in place (row, column), scaled, the offset taken off. Defined for double and
/// DoubleDouble.
template <class Scalar>
FormedEntry<Scalar> form_entry(const ShiftedMatrix& matrix, Offset k, Index row, Index column);

}  // namespace stanchion
