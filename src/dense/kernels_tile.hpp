// Triangles of one tile, included by kernels_impl.hpp once per instruction set: the unpivoted factorization,
// and the inverse of its L. Both work on a copy whose columns are whole registers, so that no loop has a
// remainder.

namespace stanchion {
namespace {

constexpr Index kPanelWidth = kLanes;  ///< columns eliminated before the rest is updated

constexpr Index whole_lanes(Index rows) {
  return (rows + kLanes - 1) / kLanes * kLanes;
}

/// `v` with zeros in the lanes before `first`.
inline Lanes lanes_from(Lanes v, Index first) {
  LaneBits keep{};
  for (Index lane = 0; lane < kLanes; ++lane) keep[lane] = lane < first ? 0 : -1;
  return (Lanes)((LaneBits)v & keep);
}

/// A tile of up to kTileWidth columns, each `leading` apart and aligned.
struct TileCopy {
  alignas(64) Real value[kTileWidth * kTileWidth];
  Index leading;

  explicit TileCopy(Index width) : leading(whole_lanes(width)) {}
  Real* column(Index j) { return value + j * leading; }

  /// The lower triangle of `tile`, zeros elsewhere.
  void take_lower(const Real* tile, Index leading_tile, Index width) {
    for (Index j = 0; j < width; ++j) {
      const Real* source = tile + static_cast<long>(j) * leading_tile;
      Real* target = column(j);
      for (Index i = 0; i < j; ++i) target[i] = 0;
      for (Index i = j; i < width; ++i) target[i] = source[i];
      for (Index i = width; i < leading; ++i) target[i] = 0;
    }
  }
};

/// Columns [j, j + Columns) of the tile less the products of the panel from `begin` on with its undivided
/// multipliers `w`.
template <Index Columns>
inline void subtract_panel(TileCopy& tile, Index begin, const Real (*w)[kTileWidth], Index j) {
  for (Index i = j / kLanes * kLanes; i < tile.leading; i += kLanes) {
    Lanes target[Columns];
    for (Index c = 0; c < Columns; ++c) target[c] = load(tile.column(j + c) + i);
    for (Index p = 0; p < kPanelWidth; ++p) {
      const Lanes row = load(tile.column(begin + p) + i);
      for (Index c = 0; c < Columns; ++c) target[c] -= row * w[p][j + c];
    }
    for (Index c = 0; c < Columns; ++c) store(tile.column(j + c) + i, target[c]);
  }
}

/// Pivots of a panel, found in its diagonal block.
struct PanelPivots {
  Real pivot[kPanelWidth], inverse[kPanelWidth];
};

/// Registers of rows [i, i + kLanes) of columns [begin, begin + count) eliminated one after the other. On the
/// diagonal (i = begin) finds the pivots.
template <bool OnDiagonal>
inline void eliminate_rows(TileCopy& tile, Index begin, Index count, Index i, PanelPivots& pivots,
                           Real (*w)[kTileWidth]) {
  Lanes x[kPanelWidth];
#pragma GCC unroll 16
  for (Index p = 0; p < kPanelWidth; ++p) x[p] = p < count ? load(tile.column(begin + p) + i) : Lanes{};
#pragma GCC unroll 16
  for (Index p = 0; p < kPanelWidth; ++p) {
    if (p >= count) continue;  // of the last panel
    const Lanes undivided = x[p];
    if (OnDiagonal) {
      pivots.pivot[p] = undivided[p];
      pivots.inverse[p] = 1 / undivided[p];
    }
    const Lanes divided = undivided * pivots.inverse[p];
    store(w[p] + i, undivided);
    store(tile.column(begin + p) + i, divided);
#pragma GCC unroll 16
    for (Index j = p + 1; j < kPanelWidth; ++j)
      x[j] -= divided * (OnDiagonal ? undivided[j] : w[p][begin + j]);
  }
}

/// Eliminates columns [begin, end) and updates these columns alone; `w` gets the columns undivided. Returns
/// the first column that is no pivot; what stands from there on is of no use but the pivot itself.
Index factor_panel(TileCopy& tile, Index begin, Index end, Index width, bool definite, double growth_limit,
                   PivotArrays pivots, Real (*w)[kTileWidth]) {
  PanelPivots found{};
  const Index count = end - begin;
  eliminate_rows<true>(tile, begin, count, begin, found, w);
  for (Index i = begin + kLanes; i < tile.leading; i += kLanes) {
    eliminate_rows<false>(tile, begin, count, i, found, w);
  }
  for (Index k = begin; k < end; ++k) {
    const Real pivot = found.pivot[k - begin];
    if (!finite(pivot) || (definite ? pivot : magnitude(pivot)) < kLeastRealPivot) return k;
    if (!definite) {
      const Real largest = abs_max(w[k - begin] + k + 1, width - k - 1);
      if (!(largest <= growth_limit * magnitude(pivot))) return k;
    }
    pivots.diagonal[k] = pivot;
    pivots.off_diagonal[k] = 0;
    pivots.kind[k] = PivotKind::kOne;
  }
  return end;
}

/// Rows above the diagonal of what is not eliminated yet hold no numbers of the result while this runs.
Index factor_tile(Real* tile, Index leading, Index width, bool definite, double growth_limit,
                  PivotArrays pivots) {
  TileCopy work(width);
  work.take_lower(tile, leading, width);
  alignas(64) Real w[kPanelWidth][kTileWidth];
  Index found = 0;
  while (found < width) {
    const Index begin = found, end = width - begin < kPanelWidth ? width : begin + kPanelWidth;
    found = factor_panel(work, begin, end, width, definite, growth_limit, pivots, w);
    for (Index i = begin + 1; i < width; ++i) {
      Real* above = tile + begin + static_cast<long>(i) * leading;
      const Index rows = (i < found ? i : found) - begin;
      for (Index p = 0; p < rows; ++p) above[p] = w[p][i];
    }
    if (found < end) break;
    constexpr Index kColumns = 4;
    Index j = end;
    for (; j + kColumns <= width; j += kColumns) subtract_panel<kColumns>(work, begin, w, j);
    for (; j < width; ++j) subtract_panel<1>(work, begin, w, j);
  }
  for (Index k = 0; k < found; ++k) {
    const Real* source = work.column(k);
    Real* target = tile + static_cast<long>(k) * leading;
    for (Index i = k + 1; i < width; ++i) target[i] = source[i];
  }
  if (found < width) tile[found + static_cast<long>(found) * leading] = w[found % kPanelWidth][found];
  return found;
}

/// Columns [c, c + Columns) of the inverse by forward substitution, a register of rows at a time.
/// `corner[k]`: column k of L below the diagonal, as far as the register of row k goes.
template <Index Columns>
inline void invert_columns(TileCopy& lower, const Lanes* corner, Index c, TileCopy& inverse) {
  const Index start = c / kLanes * kLanes;
  for (Index q = 0; q < Columns; ++q) {
    for (Index i = 0; i < start; i += kLanes) store(inverse.column(c + q) + i, Lanes{});
  }
  for (Index i = start; i < lower.leading; i += kLanes) {
    Lanes x[Columns];
    for (Index q = 0; q < Columns; ++q) {
      Real unit[kLanes] = {};
      if (i <= c + q && c + q < i + kLanes) unit[c + q - i] = 1;
      x[q] = load(unit);
    }
    for (Index k = start; k < i; ++k) {
      const Lanes row = load(lower.column(k) + i);
      for (Index q = 0; q < Columns; ++q) x[q] -= row * inverse.column(c + q)[k];
    }
#pragma GCC unroll 16
    for (Index lane = 0; lane < kLanes; ++lane) {
      for (Index q = 0; q < Columns; ++q) x[q] -= corner[i + lane] * x[q][lane];
    }
    for (Index q = 0; q < Columns; ++q) store(inverse.column(c + q) + i, x[q]);
  }
}

void invert_unit_lower(const Real* lower, Index leading, Index width, Real* inverse, Index leading_inverse) {
  TileCopy work(width), result(width);
  work.take_lower(lower, leading, width);
  Lanes corner[kTileWidth];
  for (Index k = 0; k < work.leading; ++k) {
    corner[k] = k < width ? lanes_from(load(work.column(k) + k / kLanes * kLanes), k % kLanes + 1) : Lanes{};
  }
  constexpr Index kColumns = 4;
  Index c = 0;
  for (; c + kColumns <= width; c += kColumns) invert_columns<kColumns>(work, corner, c, result);
  for (; c < width; ++c) invert_columns<1>(work, corner, c, result);
  for (Index j = 0; j < width; ++j) {
    const Real* source = result.column(j);
    Real* target = inverse + static_cast<long>(j) * leading_inverse;
    for (Index i = 0; i < width; ++i) target[i] = source[i];
  }
}

}  // namespace
}  // namespace stanchion
