// The loops behind block_kernels.hpp, included once per instruction set with STANCHION_KERNEL_ISA defined.
// Local to its translation unit; compiled without contraction, fused operations are written out.

#include "numeric/block_kernels.hpp"

namespace stanchion {
namespace {

typedef double Lanes __attribute__((vector_size(64)));

inline Lanes load(const double* p) {
  Lanes v;
  __builtin_memcpy(&v, p, sizeof(v));
  return v;
}
inline void store(double* p, Lanes v) {
  __builtin_memcpy(p, &v, sizeof(v));
}

/// a * b - c rounded once, lane by lane.
inline Lanes fused_minus(Lanes a, Lanes b, Lanes c) {
  Lanes r;
  for (int lane = 0; lane < 8; ++lane) r[lane] = __builtin_fma(a[lane], b[lane], -c[lane]);
  return r;
}

/// c + a * b, fused where the processor can: the bounds hold either way.
inline Lanes add_product(Lanes c, Lanes a, double b) {
#ifdef __FMA__
  Lanes r;
  for (int lane = 0; lane < 8; ++lane) r[lane] = __builtin_fma(a[lane], b, c[lane]);
  return r;
#else
  return c + a * b;
#endif
}

constexpr Index kPanelRows = 512;

/// sum_i = (first group ? 0 : sum_i) + four columns times their rows of x.
template <class Scalar>
void add_four_columns(const Scalar* lower, Index leading, Index rows, const double* x, Lanes* sum) {
  const Scalar *l0 = lower, *l1 = l0 + leading, *l2 = l1 + leading, *l3 = l2 + leading;
  const Lanes x0 = load(x), x1 = load(x + 8), x2 = load(x + 16), x3 = load(x + 24);
  for (Index i = 0; i < rows; ++i) {
    const Lanes pair = add_product(x0 * l0[i], x1, l1[i]);
    const Lanes other = add_product(x2 * l2[i], x3, l3[i]);
    sum[i] += pair + other;
  }
}

template <class Scalar>
void panel_times_block(const Scalar* lower, Index leading, Index rows, Index columns, const double* x,
                       double* y) {
  Lanes sum[kPanelRows];
  for (Index begin = 0; begin < rows; begin += kPanelRows) {
    const Index count = rows - begin < kPanelRows ? rows - begin : kPanelRows;
    for (Index i = 0; i < count; ++i) sum[i] = Lanes{};
    Index k = 0;
    for (; k + 4 <= columns; k += 4) {
      add_four_columns(lower + begin + static_cast<long>(k) * leading, leading, count, x + 8 * k, sum);
    }
    for (; k < columns; ++k) {
      const Scalar* l = lower + begin + static_cast<long>(k) * leading;
      const Lanes v = load(x + 8 * k);
      for (Index i = 0; i < count; ++i) sum[i] = add_product(sum[i], v, l[i]);
    }
    double* out = y + 8 * static_cast<long>(begin);
    for (Index i = 0; i < count; ++i) store(out + 8 * i, load(out + 8 * i) + sum[i]);
  }
}

template <class Scalar>
void panel_transposed_times_block(const Scalar* lower, Index leading, Index rows, Index columns,
                                  const double* x, double* out) {
  Index k = 0;
  for (; k + 4 <= columns; k += 4) {
    const Scalar* l0 = lower + static_cast<long>(k) * leading;
    const Scalar *l1 = l0 + leading, *l2 = l1 + leading, *l3 = l2 + leading;
    Lanes s0{}, s1{}, s2{}, s3{};
    for (Index i = 0; i < rows; ++i) {
      const Lanes v = load(x + 8 * static_cast<long>(i));
      s0 = add_product(s0, v, l0[i]);
      s1 = add_product(s1, v, l1[i]);
      s2 = add_product(s2, v, l2[i]);
      s3 = add_product(s3, v, l3[i]);
    }
    double* o = out + 8 * static_cast<long>(k);
    store(o, load(o) + s0);
    store(o + 8, load(o + 8) + s1);
    store(o + 16, load(o + 16) + s2);
    store(o + 24, load(o + 24) + s3);
  }
  for (; k < columns; ++k) {
    const Scalar* l = lower + static_cast<long>(k) * leading;
    Lanes s{};
    for (Index i = 0; i < rows; ++i) s = add_product(s, load(x + 8 * static_cast<long>(i)), l[i]);
    double* o = out + 8 * static_cast<long>(k);
    store(o, load(o) + s);
  }
}

template <class Scalar>
void solve_triangle(const Scalar* lower, Index leading, Index columns, double* x) {
  Index k = 0;
  for (; k + 4 <= columns; k += 4) {
    const Scalar* l0 = lower + static_cast<long>(k) * leading;
    const Scalar *l1 = l0 + leading, *l2 = l1 + leading, *l3 = l2 + leading;
    double* own = x + 8 * static_cast<long>(k);
    const Lanes n0 = -load(own);
    const Lanes x1 = add_product(load(own + 8), n0, l0[k + 1]), n1 = -x1;
    const Lanes x2 = add_product(add_product(load(own + 16), n0, l0[k + 2]), n1, l1[k + 2]), n2 = -x2;
    const Lanes x3 =
        add_product(add_product(add_product(load(own + 24), n0, l0[k + 3]), n1, l1[k + 3]), n2, l2[k + 3]);
    const Lanes n3 = -x3;
    store(own + 8, x1);
    store(own + 16, x2);
    store(own + 24, x3);
    for (Index i = k + 4; i < columns; ++i) {
      const Lanes pair = add_product(n0 * l0[i], n1, l1[i]);
      const Lanes other = add_product(n2 * l2[i], n3, l3[i]);
      double* to = x + 8 * static_cast<long>(i);
      store(to, load(to) + (pair + other));
    }
  }
  for (; k < columns; ++k) {
    const Scalar* l = lower + static_cast<long>(k) * leading;
    const Lanes n = -load(x + 8 * static_cast<long>(k));
    for (Index i = k + 1; i < columns; ++i) {
      double* to = x + 8 * static_cast<long>(i);
      store(to, add_product(load(to), n, l[i]));
    }
  }
}

template <class Scalar>
void solve_transposed_triangle(const Scalar* lower, Index leading, Index columns, const double* sums,
                               double* x) {
  Index k = columns;
  for (; k >= 4; k -= 4) {
    const Scalar* l0 = lower + static_cast<long>(k - 4) * leading;
    const Scalar *l1 = l0 + leading, *l2 = l1 + leading, *l3 = l2 + leading;
    const double* sum = sums + 8 * static_cast<long>(k - 4);
    Lanes s0 = load(sum), s1 = load(sum + 8), s2 = load(sum + 16), s3 = load(sum + 24);
    for (Index i = k; i < columns; ++i) {
      const Lanes v = load(x + 8 * static_cast<long>(i));
      s0 = add_product(s0, v, l0[i]);
      s1 = add_product(s1, v, l1[i]);
      s2 = add_product(s2, v, l2[i]);
      s3 = add_product(s3, v, l3[i]);
    }
    double* own = x + 8 * static_cast<long>(k - 4);
    const Lanes x3 = load(own + 24) - s3;
    const Lanes x2 = load(own + 16) - add_product(s2, x3, l2[k - 1]);
    const Lanes x1 = load(own + 8) - add_product(add_product(s1, x3, l1[k - 1]), x2, l1[k - 2]);
    const Lanes x0 =
        load(own) - add_product(add_product(add_product(s0, x3, l0[k - 1]), x2, l0[k - 2]), x1, l0[k - 3]);
    store(own, x0);
    store(own + 8, x1);
    store(own + 16, x2);
    store(own + 24, x3);
  }
  while (k-- > 0) {
    const Scalar* l = lower + static_cast<long>(k) * leading;
    Lanes s = load(sums + 8 * static_cast<long>(k));
    for (Index i = k + 1; i < columns; ++i) s = add_product(s, load(x + 8 * static_cast<long>(i)), l[i]);
    double* own = x + 8 * static_cast<long>(k);
    store(own, load(own) - s);
  }
}

struct Pair {
  double high, low;
};

inline Pair two_sum(double a, double b) {
  const double s = a + b, t = s - a;
  return {s, (a - (s - t)) + (b - t)};
}

inline Pair two_product(double a, double b) {
  const double p = a * b;
  return {p, __builtin_fma(a, b, -p)};
}

/// sum_t c_t v_t with an error below 4 m 2^-106 of sum_t |c_t v_t|, m the members.
inline Pair coefficient(const DataColumns& data, Offset k) {
  Pair sum = two_product(data.coefficients[0], data.values[0][k]);
  for (Index t = 1; t < data.members; ++t) {
    const Pair term = two_product(data.coefficients[t], data.values[t][k]);
    const Pair head = two_sum(sum.high, term.high);
    const double tail = head.low + (sum.low + term.low);
    const double high = head.high + tail;
    sum = {high, tail - (high - head.high)};
  }
  return sum;
}

struct LanePair {
  Lanes high, low;
};

/// total += (a_high + a_low) y, lane by lane.
inline void accumulate(LanePair& total, Pair a, Lanes y) {
  const Lanes product = y * a.high;
  const Lanes a_high = Lanes{} + a.high;
  const Lanes product_low = fused_minus(a_high, y, product) + y * a.low;
  const Lanes s = total.high + product, t = s - total.high;
  const Lanes error = (total.high - (s - t)) + (product - t);
  const Lanes low = error + (total.low + product_low);
  const Lanes high = s + low;
  total.low = low - (high - s);
  total.high = high;
}

void extended_product(const DataColumns& data, Index begin, Index end, const double* y, double* high,
                      double* low) {
  const bool plain = data.members == 1 && data.coefficients[0] == 1;
  for (Index j = begin; j < end; ++j) {
    const long at_j = 8 * static_cast<long>(j);
    const Lanes y_j = load(y + at_j);
    LanePair own{load(high + at_j), load(low + at_j)};
    for (Offset k = data.column_start[j]; k < data.column_start[static_cast<Offset>(j) + 1]; ++k) {
      const Index i = data.row[k];
      const Pair a = plain ? Pair{data.values[0][k], 0.0} : coefficient(data, k);
      const long at_i = 8 * static_cast<long>(i);
      accumulate(own, a, load(y + at_i));
      if (i == j) continue;
      LanePair other{load(high + at_i), load(low + at_i)};
      accumulate(other, a, y_j);
      store(high + at_i, other.high);
      store(low + at_i, other.low);
    }
    store(high + at_j, own.high);
    store(low + at_j, own.low);
  }
}

}  // namespace

namespace STANCHION_KERNEL_ISA {
extern const BlockKernels block_table;
const BlockKernels block_table{{panel_times_block<double>, panel_transposed_times_block<double>,
                                solve_triangle<double>, solve_transposed_triangle<double>},
                               {panel_times_block<float>, panel_transposed_times_block<float>,
                                solve_triangle<float>, solve_transposed_triangle<float>},
                               extended_product};
}  // namespace STANCHION_KERNEL_ISA
}  // namespace stanchion
