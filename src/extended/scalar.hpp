// What a number must offer so that a front can be factored in it. Two scalars do: double and DoubleDouble.
#pragma once

#include "base/double_double.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// `planes`: doubles a number takes; arrays hold all heads first, then all tails, so that loops vectorise.
/// The rounding constants are derived in error_bound.md.
template <class Scalar>
struct ScalarTraits;

template <>
struct ScalarTraits<double> {
  static constexpr Index planes = 1;
  static constexpr double unit = kDoubleUnit;   ///< of one subtract_product, see (1)
  static constexpr Index pivot_roundings = 40;  ///< divisions by pivots on both sides, and what (1) adds to K
};

template <>
struct ScalarTraits<DoubleDouble> {
  static constexpr Index planes = 2;
  static constexpr double unit = 4.1 * kDoubleUnitSquared;
  static constexpr Index pivot_roundings = 60;
};

/// Factors of the error of a front with `pivots` pivots: of the row sums of |L||D||L^T|, and of |S| handed
/// on.
template <class Scalar>
constexpr double growth_factor(Index pivots) {
  return ScalarTraits<Scalar>::unit * (pivots + ScalarTraits<Scalar>::pivot_roundings);
}
template <class Scalar>
constexpr double handed_on_factor(Index pivots) {
  return ScalarTraits<Scalar>::unit * (pivots + 2);
}

STANCHION_INLINE double subtract_product(double c, double a, double b) {
  return __builtin_fma(-a, b, c);
}

STANCHION_INLINE double head(double x) {
  return x;
}
STANCHION_INLINE double head(DoubleDouble x) {
  return x.hi;
}
STANCHION_INLINE void widen(double from, double& to) {
  to = from;
}
STANCHION_INLINE void widen(double from, DoubleDouble& to) {
  to = {from, 0};
}

/// A run of numbers: heads at data[i], tails (where the scalar has them) at data[plane + i]. Nothing is
/// owned.
template <class Scalar>
struct Strip {
  double* data = nullptr;
  Offset plane = 0;

  STANCHION_INLINE Strip operator+(Offset i) const { return {data + i, plane}; }
};

STANCHION_INLINE double load(const Strip<double>& strip, Offset i) {
  return strip.data[i];
}
STANCHION_INLINE DoubleDouble load(const Strip<DoubleDouble>& strip, Offset i) {
  return {strip.data[i], strip.data[strip.plane + i]};
}
STANCHION_INLINE void store(const Strip<double>& strip, Offset i, double x) {
  strip.data[i] = x;
}
STANCHION_INLINE void store(const Strip<DoubleDouble>& strip, Offset i, DoubleDouble x) {
  strip.data[i] = x.hi;
  strip.data[strip.plane + i] = x.lo;
}

}  // namespace stanchion
