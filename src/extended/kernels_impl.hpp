// The kernels themselves. Included by one file per instruction set, which defines STANCHION_KERNEL_ISA.
// Only always-inlined functions and names without linkage may be used here: anything else could be shared by
// the linker with code for another processor.
#include "extended/kernels.hpp"

#ifdef __clang__
#define STANCHION_INDEPENDENT _Pragma("clang loop vectorize(assume_safety)")
#else
#define STANCHION_INDEPENDENT _Pragma("GCC ivdep")
#endif

namespace stanchion::STANCHION_KERNEL_ISA {
namespace {

constexpr Index kRowPiece =
    128;  ///< rows of c that stay in the nearest cache while all products are taken off

template <class Scalar>
void subtract_products(Strip<Scalar> c, Strip<Scalar> l, Offset leading, const Scalar* w, Index rows,
                       Index count) {
  for (Index begin = 0; begin < rows; begin += kRowPiece) {
    const Index end = begin + kRowPiece < rows ? begin + kRowPiece : rows;
    for (Index k = 0; k < count; ++k) {
      const Strip<Scalar> column = l + k * leading;
      const Scalar factor = w[k];
      STANCHION_INDEPENDENT
      for (Index i = begin; i < end; ++i) store(c, i, subtract_product(load(c, i), load(column, i), factor));
    }
  }
}

template <class Scalar>
double divide(Strip<Scalar> w, Strip<Scalar> l, Index rows, Scalar pivot) {
  Scalar one;
  widen(1, one);
  const Scalar inverse = one / pivot;
  STANCHION_INDEPENDENT
  for (Index i = 0; i < rows; ++i) store(l, i, load(w, i) * inverse);
  double sum = 0;
  for (Index i = 0; i < rows; ++i) sum += __builtin_fabs(l.data[i]);
  return sum;
}

template <class Scalar>
void solve_pair(Strip<Scalar> w_first, Strip<Scalar> w_second, Strip<Scalar> l_first, Strip<Scalar> l_second,
                Index rows, const PairPivot<Scalar>& pivot, double* sums) {
  Scalar one;
  widen(1, one);
  const Scalar ab = pivot.a / pivot.b, cb = pivot.c / pivot.b;
  const Scalar inverse = one / (pivot.b * (ab * cb - one));
  STANCHION_INDEPENDENT
  for (Index i = 0; i < rows; ++i) {
    const Scalar f = load(w_first, i), g = load(w_second, i);
    store(l_first, i, (cb * f - g) * inverse);
    store(l_second, i, (ab * g - f) * inverse);
  }
  sums[0] = sums[1] = 0;
  for (Index i = 0; i < rows; ++i) {
    sums[0] += __builtin_fabs(l_first.data[i]);
    sums[1] += __builtin_fabs(l_second.data[i]);
  }
}

template <class Scalar>
void add_weighted(Strip<Scalar> x, Index rows, double weight, double* out) {
  STANCHION_INDEPENDENT
  for (Index i = 0; i < rows; ++i) out[i] += __builtin_fabs(x.data[i]) * weight;
}

template <class Scalar>
double largest(Strip<Scalar> x, Index rows) {
  double most = 0, poison = 0;  // poison: zero while everything is finite, then NaN
  for (Index i = 0; i < rows; ++i) {
    const double size = __builtin_fabs(x.data[i]);
    most = size > most ? size : most;
    poison += size * 0;
  }
  return poison == 0 ? most : __builtin_inf();
}

template <class Scalar>
constexpr ScalarKernels<Scalar> table_of() {
  return {STANCHION_KERNEL_NAME, subtract_products<Scalar>, divide<Scalar>,
          solve_pair<Scalar>,    add_weighted<Scalar>,      largest<Scalar>};
}

}  // namespace

extern const ScalarKernels<double> double_table;
extern const ScalarKernels<DoubleDouble> double_double_table;
constexpr ScalarKernels<double> double_table = table_of<double>();
constexpr ScalarKernels<DoubleDouble> double_double_table = table_of<DoubleDouble>();

}  // namespace stanchion::STANCHION_KERNEL_ISA
