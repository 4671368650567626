// The exact inertia of one pivot.
#pragma once

#include "dense/kernels.hpp"

namespace stanchion {

/// Numbers of negative, zero and positive eigenvalues.
struct SignCount {
  int negative = 0, zero = 0, positive = 0;
};

SignCount sign_of_pivot(double diagonal);

/// Exact inertia of [a b; b c] for finite a, b, c: exponents are compared first, then a c and b^2 as
/// unevaluated sums of two doubles (Dekker, Numer. Math. 18 (1971)) of the mantissas, so that nothing over-
/// or underflows.
SignCount sign_of_two_by_two(double a, double b, double c);

/// Sum over `count` pivots.
SignCount sign_of_pivots(const PivotArrays& pivots, Index count);

}  // namespace stanchion
