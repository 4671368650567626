// A number held as the unevaluated sum of two doubles: about 106 bits, every operation with a proven error
// bound.
#pragma once

namespace stanchion {

/// Always inlined, so that the same function compiled for several instruction sets never leaves a symbol
/// behind that the linker could pick for the wrong processor.
#define STANCHION_INLINE [[gnu::always_inline]] inline

/// hi + lo with |lo| <= u |hi|, u = 2^-53: hi is the sum rounded to double, so the sign of the number is that
/// of hi.
///
/// Bounds below are relative errors in the absence of under- and overflow, in units of u^2 = 2^-106.
/// JMP: Joldes, Muller, Popescu, Tight and rigorous error bounds for basic building blocks of double-word
/// arithmetic, ACM TOMS 44 (2017), 15res; the roots are Dekker, Numer. Math. 18 (1971), and Knuth, TAOCP
/// vol. 2. The proofs need every rounding where it is written: no -ffast-math, no contraction (the build
/// forbids both).
struct DoubleDouble {
  double hi = 0, lo = 0;
};

constexpr double kDoubleUnit = 0x1p-53;          ///< u
constexpr double kDoubleUnitSquared = 0x1p-106;  ///< u^2

/// a + b exactly, any order of sizes (Knuth, TAOCP vol. 2, 4.2.2, theorem B).
STANCHION_INLINE DoubleDouble two_sum(double a, double b) {
  const double sum = a + b, b_seen = sum - a;
  return {sum, (a - (sum - b_seen)) + (b - b_seen)};
}

/// a + b exactly where |a| >= |b| or a = 0 (Dekker 1971).
STANCHION_INLINE DoubleDouble fast_two_sum(double a, double b) {
  const double sum = a + b;
  return {sum, b - (sum - a)};
}

/// a b exactly, unless the tail underflows.
STANCHION_INLINE DoubleDouble two_product(double a, double b) {
  const double product = a * b;
  return {product, __builtin_fma(a, b, -product)};
}

STANCHION_INLINE DoubleDouble operator-(DoubleDouble x) {
  return {-x.hi, -x.lo};
}

/// At most 3 u^2 + 13 u^3 (JMP, algorithm 6, theorem 3.1), also when x and y nearly cancel.
STANCHION_INLINE DoubleDouble operator+(DoubleDouble x, DoubleDouble y) {
  const DoubleDouble heads = two_sum(x.hi, y.hi), tails = two_sum(x.lo, y.lo);
  const DoubleDouble sum = fast_two_sum(heads.hi, heads.lo + tails.hi);
  return fast_two_sum(sum.hi, tails.lo + sum.lo);
}

STANCHION_INLINE DoubleDouble operator-(DoubleDouble x, DoubleDouble y) {
  return x + -y;
}

/// At most 5 u^2 (JMP, algorithm 12, theorem 5.4; 4 u^2 by Muller and Rideau, ACM TOMS 48 (2022)).
STANCHION_INLINE DoubleDouble operator*(DoubleDouble x, DoubleDouble y) {
  const DoubleDouble head = two_product(x.hi, y.hi);
  const double cross = __builtin_fma(x.lo, y.hi, __builtin_fma(x.hi, y.lo, x.lo * y.lo));
  return fast_two_sum(head.hi, head.lo + cross);
}

/// At most 1.5 u^2 + 4 u^3 (JMP, algorithm 7, theorem 4.1).
STANCHION_INLINE DoubleDouble operator*(DoubleDouble x, double y) {
  const DoubleDouble head = two_product(x.hi, y);
  const DoubleDouble sum = fast_two_sum(head.hi, x.lo * y);
  return fast_two_sum(sum.hi, sum.lo + head.lo);
}

/// At most 15 u^2 + 56 u^3 (JMP, algorithm 17, theorem 7.1). y is not zero.
STANCHION_INLINE DoubleDouble operator/(DoubleDouble x, DoubleDouble y) {
  const double quotient = x.hi / y.hi;
  const DoubleDouble taken = y * quotient;
  const double rest = (x.hi - taken.hi) + (x.lo - taken.lo);
  return fast_two_sum(quotient, rest / y.hi);
}

/// c - a b in 18 operations, with an absolute bound (derived in src/extended/error_bound.md, section 1):
/// |error| <= u^2 (9 |a b| + 2 |c| + 2 |c - a b|)(1 + 8 u). Not a small relative error when c and a b cancel;
/// a sum of many products does not need one. All results are normalised whatever the sizes of c and a b.
STANCHION_INLINE DoubleDouble subtract_product(DoubleDouble c, DoubleDouble a, DoubleDouble b) {
  const double product = a.hi * b.hi;
  const double tail =
      __builtin_fma(a.hi, b.lo, __builtin_fma(a.lo, b.hi, __builtin_fma(a.hi, b.hi, -product)));
  const DoubleDouble head = two_sum(c.hi, -product);
  return two_sum(head.hi, (c.lo + head.lo) - tail);
}

/// Exact for a power of two, unless the result over- or underflows.
STANCHION_INLINE DoubleDouble scaled(DoubleDouble x, double power_of_two) {
  return {x.hi * power_of_two, x.lo * power_of_two};
}

}  // namespace stanchion
