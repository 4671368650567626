// Matrix products on packed operands, included by kernels_impl.hpp once per instruction set.
//
// A packed operand is cut into strips of kRowStrip (left) or kColumnStrip (right) rows; a strip holds, for
// one product after the other, its entries side by side, zeros where rows end. So the loops below read memory
// straight on.

namespace stanchion {
namespace {

// Accumulators for kRowVectors x kColumnStrip registers, with what feeds them, fill the register file.
#if STANCHION_LANE_BYTES == 16
constexpr Index kRowVectors = 4;
#else
constexpr Index kRowVectors = 3;
#endif
constexpr Index kRowStrip = kRowVectors * kLanes;
// One register of a product is one column of a right strip in double, of two strips in single precision:
// the registers hold sums for as many columns either way.
constexpr Index kColumnStrip = STANCHION_LANE_BYTES / 8;
constexpr Index kStripsOfLanes = kLanes / kColumnStrip;

#ifdef STANCHION_KERNEL_SINGLE
typedef Real HalfLanes __attribute__((vector_size(STANCHION_LANE_BYTES / 2)));
#if STANCHION_LANE_BYTES == 64
#define STANCHION_LOWER_HALF 0, 1, 2, 3, 4, 5, 6, 7
#define STANCHION_UPPER_HALF 8, 9, 10, 11, 12, 13, 14, 15
#elif STANCHION_LANE_BYTES == 32
#define STANCHION_LOWER_HALF 0, 1, 2, 3
#define STANCHION_UPPER_HALF 4, 5, 6, 7
#else
#define STANCHION_LOWER_HALF 0, 1
#define STANCHION_UPPER_HALF 2, 3
#endif
/// One column of kLanes rows of a right operand.
inline Lanes load_rows(const Real* p, long stride) {
  HalfLanes low, high;
  __builtin_memcpy(&low, p, sizeof(low));
  __builtin_memcpy(&high, p + stride, sizeof(high));
  return __builtin_shufflevector(low, high, STANCHION_LOWER_HALF, STANCHION_UPPER_HALF);
}
inline void store_rows(Real* p, long stride, Lanes v) {
  const HalfLanes low = __builtin_shufflevector(v, v, STANCHION_LOWER_HALF),
                  high = __builtin_shufflevector(v, v, STANCHION_UPPER_HALF);
  __builtin_memcpy(p, &low, sizeof(low));
  __builtin_memcpy(p + stride, &high, sizeof(high));
}
#else
/// One column of kLanes rows of a right operand.
inline Lanes load_rows(const Real* p, long) {
  return load(p);
}
inline void store_rows(Real* p, long, Lanes v) {
  store(p, v);
}
#endif

/// Sums over `depth` products of V registers of rows with a strip of columns. Row entries of product p start
/// at a + p leading.
template <Index V>
struct Sums {
  Lanes value[kColumnStrip][V];

  __attribute__((always_inline)) void form(const Real* a, long leading, const Real* b, Index depth) {
#pragma GCC unroll 8
    for (Index j = 0; j < kColumnStrip; ++j) {
#pragma GCC unroll 4
      for (Index v = 0; v < V; ++v) value[j][v] = Lanes{};
    }
    for (Index p = 0; p < depth; ++p) {
      Lanes row[V];
#pragma GCC unroll 4
      for (Index v = 0; v < V; ++v) row[v] = load(a + v * kLanes);
#pragma GCC unroll 8
      for (Index j = 0; j < kColumnStrip; ++j) {
        const Lanes column = Lanes{} + b[j];
#pragma GCC unroll 4
        for (Index v = 0; v < V; ++v) value[j][v] += row[v] * column;
      }
      a += leading;
      b += kColumnStrip;
    }
  }
};

/// C -= sums, every row and column.
template <Index V>
__attribute__((always_inline)) inline void subtract(const Sums<V>& sums, Real* c, long leading) {
#pragma GCC unroll 8
  for (Index j = 0; j < kColumnStrip; ++j) {
    Real* target = c + j * leading;
#pragma GCC unroll 4
    for (Index v = 0; v < V; ++v) store(target + v * kLanes, load(target + v * kLanes) - sums.value[j][v]);
  }
}

/// C -= sums for the rows and columns named.
template <Index V>
void subtract_part(const Sums<V>& sums, Index rows, Index first_column, Index columns, Real* c,
                   long leading) {
  Real whole[kColumnStrip][V * kLanes];
#pragma GCC unroll 8
  for (Index j = 0; j < kColumnStrip; ++j) {
#pragma GCC unroll 4
    for (Index v = 0; v < V; ++v) store(whole[j] + v * kLanes, sums.value[j][v]);
  }
  for (Index j = first_column; j < columns; ++j) {
    for (Index i = 0; i < rows; ++i) c[i + j * leading] -= whole[j][i];
  }
}

template <Index V>
void subtract_strip(const Real* a, const Real* b, Index depth, Index rows, Index first_column, Index columns,
                    Real* c, long leading) {
  // C is on its way while the sums are formed.
  for (Index j = 0; j < columns; ++j) {
    for (Index v = 0; v < V * kLanes; v += 64 / sizeof(Real)) __builtin_prefetch(c + v + j * leading, 1);
  }
  Sums<V> sums;
  sums.form(a, kRowStrip, b, depth);
  if (rows == V * kLanes && first_column <= 0 && columns == kColumnStrip) {
    subtract(sums, c, leading);
  } else {
    subtract_part(sums, rows, first_column < 0 ? 0 : first_column, columns, c, leading);
  }
}

void subtract_product(const Real* left, Index left_stride, const Real* right, Index right_stride, Index depth,
                      Index rows, Index columns, Index first_row, Index first_column, Real* c,
                      Index leading) {
  if (rows <= 0) return;  // an operand without rows may be null
  for (Index j = first_column / kColumnStrip * kColumnStrip; j < columns; j += kColumnStrip) {
    const Real* b = right + static_cast<long>(j / kColumnStrip) * right_stride;
    const Index width = columns - j < kColumnStrip ? columns - j : kColumnStrip;
    // Strips that end above the diagonal are left out: row i of the product is row first_row + i of column 0.
    Index i = j > first_row ? (j - first_row) / kRowStrip * kRowStrip : 0;
    for (; i < rows; i += kRowStrip) {
      const Real* a = left + static_cast<long>(i / kRowStrip) * left_stride;
      Real* target = c + i + static_cast<long>(j) * leading;
      const Index height = rows - i < kRowStrip ? rows - i : kRowStrip;
      switch ((height + kLanes - 1) / kLanes) {
        case 1:
          subtract_strip<1>(a, b, depth, height, first_column - j, width, target, leading);
          break;
        case 2:
          subtract_strip<2>(a, b, depth, height, first_column - j, width, target, leading);
          break;
        case 3:
          subtract_strip<3>(a, b, depth, height, first_column - j, width, target, leading);
          break;
        default:
          subtract_strip<kRowVectors>(a, b, depth, height, first_column - j, width, target, leading);
      }
    }
  }
}

template <Index V>
void multiply_strip(const Real* a, long leading_a, const Real* b, Index depth, Real* out, long out_stride) {
  Sums<V> sums;
  sums.form(a, leading_a, b, depth);
#pragma GCC unroll 4
  for (Index v = 0; v < V; ++v) {
#pragma GCC unroll 8
    for (Index j = 0; j < kColumnStrip; ++j) {
      store_rows(out + v * kStripsOfLanes * out_stride + j * kColumnStrip, out_stride, sums.value[j][v]);
    }
  }
}

/// The rows of a last, partial register with zeros after them.
void pad_rows(const Real* a, Index leading, Index rows, Index depth, Real* padded) {
  for (Index p = 0; p < depth; ++p) {
    for (Index i = 0; i < kLanes; ++i)
      padded[i + p * kLanes] = i < rows ? a[i + static_cast<long>(p) * leading] : 0;
  }
}

void multiply_by_upper(const Real* a, Index leading, Index rows, const Real* factor, Index width, Real* out,
                       Index out_stride) {
  if (rows <= 0) return;
  for (Index j = 0; j < width; j += kColumnStrip) {
    // Column j of the factor has its last entry on the diagonal.
    const Index depth = j + kColumnStrip < width ? j + kColumnStrip : width;
    const Real* b = factor + static_cast<long>(j) * kTileWidth;
    Real* target = out + static_cast<long>(j) * kColumnStrip;
    Index i = 0;
    for (; i + kRowStrip <= rows; i += kRowStrip) {
      multiply_strip<kRowVectors>(a + i, leading, b, depth,
                                  target + static_cast<long>(i / kColumnStrip) * out_stride, out_stride);
    }
    for (; i + kLanes <= rows; i += kLanes) {
      multiply_strip<1>(a + i, leading, b, depth, target + static_cast<long>(i / kColumnStrip) * out_stride,
                        out_stride);
    }
    if (i < rows) {
      Real padded[kTileWidth * kLanes];
      pad_rows(a + i, leading, rows - i, depth, padded);
      multiply_strip<1>(padded, kLanes, b, depth, target + static_cast<long>(i / kColumnStrip) * out_stride,
                        out_stride);
    }
  }
}

/// Zeros follow to the end of a strip, and of a register where that is longer.
template <Index Strip>
void pack(const Real* source, Index leading, Index rows, Index depth, Real* packed, Index stride) {
  constexpr Index kWhole = Strip < kLanes ? kLanes : Strip;
  for (Index i = 0; i < (rows + kWhole - 1) / kWhole * kWhole; i += Strip) {
    Real* target = packed + static_cast<long>(i / Strip) * stride;
    for (Index p = 0; p < depth; ++p) {
      const Real* from = source + i + static_cast<long>(p) * leading;
      if (i + Strip <= rows) {
        if constexpr (Strip < kLanes) {
          __builtin_memcpy(target + p * Strip, from, Strip * sizeof(Real));
        } else {
          for (Index v = 0; v < Strip; v += kLanes) store(target + p * Strip + v, load(from + v));
        }
      } else {
        for (Index r = 0; r < Strip; ++r) target[p * Strip + r] = i + r < rows ? from[r] : 0;
      }
    }
  }
}

/// Largest |w_ik| of `Columns` columns next to each other; infinite when one is not a number.
template <Index Columns>
void columns_abs_max(const Real* w, Index stride, Index registers, Real* out) {
  Lanes largest[Columns]{}, probe[Columns]{};
  for (Index s = 0; s < registers; ++s, w += static_cast<long>(kStripsOfLanes) * stride) {
#pragma GCC unroll 8
    for (Index k = 0; k < Columns; ++k) {
      const Lanes v = load_rows(w + k * kColumnStrip, stride), m = magnitude(v);
      largest[k] = m > largest[k] ? m : largest[k];
      probe[k] += v * Real{0};
    }
  }
  for (Index k = 0; k < Columns; ++k) {
    Real result = 0;
    for (Index lane = 0; lane < kLanes; ++lane)
      result = largest[k][lane] > result ? largest[k][lane] : result;
    out[k] = sum_of(probe[k]) == 0 ? result : kInfinity;
  }
}

void strips_abs_max(const Real* w, Index stride, Index rows, Index columns, Real* out) {
  const Index registers = (rows + kLanes - 1) / kLanes;
  for (Index empty = 0; registers == 0 && empty < columns; ++empty) out[empty] = 0;
  if (registers == 0) return;
  Index k = 0;
  for (; k + 8 <= columns; k += 8) columns_abs_max<8>(w + k * kColumnStrip, stride, registers, out + k);
  for (; k < columns; ++k) columns_abs_max<1>(w + k * kColumnStrip, stride, registers, out + k);
}

/// One column of multipliers on its way out: to the left operand, to the front when asked, and into the sums.
struct ColumnOut {
  Real* left;
  Index left_stride;
  Real* plain;  // may be null
  const Real* sign;
  Index rows;
  Lanes sizes{}, signs{};

  void put(Index strip, Lanes v) {
    const Index row = strip * kLanes;
    store(left + static_cast<long>(strip / kRowVectors) * left_stride + strip % kRowVectors * kLanes, v);
    sizes += magnitude(v);
    if (row + kLanes <= rows) {
      if (plain != nullptr) store(plain + row, v);
      signs += v * load(sign + row);
      return;
    }
    Lanes some{};
    for (Index i = 0; row + i < rows; ++i) {
      if (plain != nullptr) plain[row + i] = v[i];
      some[i] = sign[row + i];
    }
    signs += v * some;
  }
  /// Zeros in the registers of the last left strip that no row reaches.
  void finish(Index strips, Real& abs_sum, Real& signed_sum) {
    for (Index s = strips; s % kRowVectors != 0; ++s) {
      store(left + static_cast<long>(s / kRowVectors) * left_stride + s % kRowVectors * kLanes, Lanes{});
    }
    abs_sum += sum_of(sizes);
    signed_sum += sum_of(signs);
  }
};

void divide_strips(const Real* w, Index stride, Index rows, Index columns, PivotArrays pivots,
                   const Real* sign, Real* left, Index left_stride, Real* plain, Index leading, Real* abs_sum,
                   Real* signed_sum) {
  if (rows <= 0) return;
  const Index strips = (rows + kLanes - 1) / kLanes;
  const auto column = [&](Index k) {
    return ColumnOut{left + static_cast<long>(k) * kRowStrip, left_stride,
                     plain == nullptr ? nullptr : plain + static_cast<long>(k) * leading, sign, rows};
  };
  for (Index k = 0; k < columns; ++k) {
    const Real* f = w + static_cast<long>(k) * kColumnStrip;
    ColumnOut x = column(k);
    if (pivots.kind[k] == PivotKind::kTwoFirst) {
      const TwoByTwo solve(static_cast<Real>(pivots.diagonal[k]), static_cast<Real>(pivots.off_diagonal[k]),
                           static_cast<Real>(pivots.diagonal[k + 1]));
      const Real* g = f + kColumnStrip;
      ColumnOut y = column(k + 1);
      for (Index s = 0; s < strips; ++s) {
        const long at = static_cast<long>(s) * kStripsOfLanes * stride;
        const Lanes first = load_rows(f + at, stride), second = load_rows(g + at, stride);
        x.put(s, (solve.c_over_b * first - second) * solve.inverse);
        y.put(s, (solve.a_over_b * second - first) * solve.inverse);
      }
      x.finish(strips, abs_sum[k], signed_sum[k]);
      y.finish(strips, abs_sum[k + 1], signed_sum[k + 1]);
      ++k;
      continue;
    }
    const Real inverse = pivots.kind[k] == PivotKind::kZero ? 0 : 1 / static_cast<Real>(pivots.diagonal[k]);
    for (Index s = 0; s < strips; ++s) {
      x.put(s, load_rows(f + static_cast<long>(s) * kStripsOfLanes * stride, stride) * inverse);
    }
    x.finish(strips, abs_sum[k], signed_sum[k]);
  }
}

/// Sums of four products at a time are added to what growth and image hold.
void strips_growth_and_image(const Real* left, Index stride, Index rows, Index columns, const Real* weight,
                             const Real* step, Real* growth, Real* image) {
  for (Index begin = 0; begin < rows; begin += kLanes) {
    const Index strip = begin / kLanes, count = rows - begin < kLanes ? rows - begin : kLanes;
    const Real* a = left + static_cast<long>(strip / kRowVectors) * stride + strip % kRowVectors * kLanes;
    Lanes size{}, share{};
    for (Index i = 0; i < count; ++i) {
      size[i] = growth[begin + i];
      share[i] = image[begin + i];
    }
    Index k = 0;
    for (; k + 4 <= columns; k += 4) {
      const Lanes v0 = load(a), v1 = load(a + kRowStrip), v2 = load(a + 2 * kRowStrip),
                  v3 = load(a + 3 * kRowStrip);
      const Real *f = weight + k, *t = step + k;
      size += magnitude(v0) * f[0] + magnitude(v1) * f[1] + magnitude(v2) * f[2] + magnitude(v3) * f[3];
      share += v0 * t[0] + v1 * t[1] + v2 * t[2] + v3 * t[3];
      a += 4 * kRowStrip;
    }
    for (; k < columns; ++k, a += kRowStrip) {
      size += magnitude(load(a)) * weight[k];
      share += load(a) * step[k];
    }
    for (Index i = 0; i < count; ++i) {
      growth[begin + i] = size[i];
      image[begin + i] = share[i];
    }
  }
}

void pack_left(const Real* source, Index leading, Index rows, Index depth, Real* packed, Index stride) {
  pack<kRowStrip>(source, leading, rows, depth, packed, stride);
}

void pack_right(const Real* source, Index leading, Index rows, Index depth, Real* packed, Index stride) {
  pack<kColumnStrip>(source, leading, rows, depth, packed, stride);
}

}  // namespace
}  // namespace stanchion
