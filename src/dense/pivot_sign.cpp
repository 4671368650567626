#include "dense/pivot_sign.hpp"

#include <algorithm>
#include <cmath>

namespace stanchion {
namespace {

/// Sign of a c - b^2, exactly, for magnitudes between 1/8 and 4 (no product underflows or overflows).
int sign_of_determinant(double a, double b, double c) {
  const double product = a * c, square = b * b;
  const double head = product - square;
  // Each rounded product is within half a unit of the true one; only close neighbours need the tails.
  if (std::fabs(head) > 8 * 0x1p-53 * (std::fabs(product) + square)) return head > 0 ? 1 : -1;
  const double product_tail = std::fma(a, c, -product), square_tail = std::fma(b, b, -square);
  // head is exact (Sterbenz). tail + tail_error is the exact difference of the tails (two-sum, Knuth).
  const double tail = product_tail - square_tail;
  const double shadow = tail - product_tail;
  const double tail_error = (product_tail - (tail - shadow)) + (-square_tail - shadow);
  // head is a multiple of tail's last unit, so head + tail is zero or exceeds tail_error.
  const double total = head + tail;
  const double decisive = total != 0 ? total : tail_error;
  return decisive > 0 ? 1 : (decisive < 0 ? -1 : 0);
}

}  // namespace

SignCount sign_of_pivot(double diagonal) {
  return {diagonal < 0 ? 1 : 0, diagonal == 0 ? 1 : 0, diagonal > 0 ? 1 : 0};
}

SignCount sign_of_two_by_two(double a, double b, double c) {
  if (b == 0) {
    const SignCount first = sign_of_pivot(a), second = sign_of_pivot(c);
    return {first.negative + second.negative, first.zero + second.zero, first.positive + second.positive};
  }
  const auto exponent = [](double x) {
    int e = 0;
    std::frexp(x, &e);
    return e;
  };
  if (a == 0 || c == 0 || (a > 0) != (c > 0)) return {1, 0, 1};
  const int ea = exponent(a), eb = exponent(b), ec = exponent(c);
  int sign = 0;
  if (ea + ec > 2 * eb + 2) {
    sign = 1;
  } else if (ea + ec < 2 * eb - 2) {
    sign = -1;
  } else {
    // Scale to mantissas: a' c' 2^(ea+ec) against b'^2 2^(2 eb), the exponent gap being at most 2.
    const double ma = std::ldexp(a, -ea), mc = std::ldexp(c, -ec), mb = std::ldexp(b, -eb);
    const int gap = ea + ec - 2 * eb;
    sign = sign_of_determinant(std::ldexp(ma, gap), mb, mc);
  }
  if (sign < 0) return {1, 0, 1};
  if (sign > 0) return a > 0 ? SignCount{0, 0, 2} : SignCount{2, 0, 0};
  return a > 0 ? SignCount{0, 1, 1} : SignCount{1, 1, 0};
}

SignCount sign_of_pivots(const PivotArrays& pivots, Index count) {
  SignCount total;
  for (Index k = 0; k < count; ++k) {
    SignCount one;
    if (pivots.kind[k] == PivotKind::kTwoFirst) {
      one = sign_of_two_by_two(pivots.diagonal[k], pivots.off_diagonal[k], pivots.diagonal[k + 1]);
      ++k;
    } else {
      one = sign_of_pivot(pivots.diagonal[k]);
    }
    total.negative += one.negative;
    total.zero += one.zero;
    total.positive += one.positive;
  }
  return total;
}

}  // namespace stanchion
