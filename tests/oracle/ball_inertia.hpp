// Ball arithmetic (Arb) as the oracle for matrices too large for exact rationals: signs that are proved, or
// left open.
#pragma once

#include <array>
#include <span>

#include "sparse/matrix_family.hpp"

namespace stanchion::test {

/// Numbers of eigenvalues of one sign, proved; `open` could not be told, which is all that balls can say of
/// zeros.
struct BallInertia {
  Index negative = 0, positive = 0, open = 0;
};

/// Inertia of the matrix that `matrix` denotes in exact arithmetic, less the sum of `shifts` on its diagonal.
/// Symmetric elimination in balls (Arb, https://arblib.org: every operation encloses the exact result), the
/// largest certain diagonal first, a 2x2 pivot of certain negative determinant where there is none; by
/// Sylvester's law every certain pivot is a certain sign. Starts with 192 bits and doubles until nothing is
/// open or `most_bits` are reached. Cost: rows^3 / 6 products of balls; for some hundred rows.
BallInertia ball_inertia(const ShiftedMatrix& matrix, std::span<const double> shifts = {},
                         int most_bits = 3072);

}  // namespace stanchion::test
