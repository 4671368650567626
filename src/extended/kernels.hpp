// The loops of the extended factorization, compiled once per instruction set and chosen at run time.
#pragma once

#include "extended/scalar.hpp"

namespace stanchion {

/// [a b; b c] with |a|, |c| <= 0.6404 |b|: see solve_pair.
template <class Scalar>
struct PairPivot {
  Scalar a, b, c;
};

/// The inner loops over the rows of a front. Each row is worked on alone and in one fixed order of
/// operations, so every instruction set gives the same bits. Nothing allocates; strips may not overlap.
template <class Scalar>
struct ScalarKernels {
  const char* isa;

  /// c_i -= l_i0 w_0, then l_i1 w_1, ...: column k of l starts `leading` further on than the one before.
  void (*subtract_products)(Strip<Scalar> c, Strip<Scalar> l, Offset leading, const Scalar* w, Index rows,
                            Index count);

  /// l = w / pivot, by the reciprocal. Returns an upper bound (up to rounding) of sum |l|.
  double (*divide)(Strip<Scalar> w, Strip<Scalar> l, Index rows, Scalar pivot);

  /// [l_first l_second] = [w_first w_second] [a b; b c]^-1, row by row; sums[0], sums[1] as above.
  void (*solve_pair)(Strip<Scalar> w_first, Strip<Scalar> w_second, Strip<Scalar> l_first,
                     Strip<Scalar> l_second, Index rows, const PairPivot<Scalar>& pivot, double* sums);

  /// out_i += |x_i| weight, heads only.
  void (*add_weighted)(Strip<Scalar> x, Index rows, double weight, double* out);

  /// The largest |x_i|, heads only; infinity when any is not finite.
  double (*largest)(Strip<Scalar> x, Index rows);
};

/// The best set this processor can run. Thread safe. Defined for double and DoubleDouble.
template <class Scalar>
const ScalarKernels<Scalar>& scalar_kernels();

/// Every set this processor can run, the plain one first; returns how many. For tests.
template <class Scalar>
int scalar_kernel_sets(const ScalarKernels<Scalar>* sets[3]);

}  // namespace stanchion
