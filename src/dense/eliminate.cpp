#include "dense/eliminate.hpp"

#include <algorithm>
#include <cmath>

#include "dense/blas.hpp"
#include "dense/trailing_update.hpp"

namespace stanchion {
namespace {

constexpr Index kTileRows = 256;  ///< rows below the tile handled as one piece
constexpr double kUnit = 0x1p-53;
// Parts of the sums over columns of a tile: of |L|, of |A21|, of L with the signs of the fault vector.
constexpr Index kSizes = 0, kOperand = kTileWidth, kSigned = 2 * kTileWidth, kSums = 3 * kTileWidth;

/// One column block of the front while its pivots are taken.
struct Panel {
  Index begin;  ///< first column
  Index end;    ///< end of the columns in this block that may be pivots
  Index next;   ///< first column not yet eliminated
};

class FrontEliminator {
 public:
  FrontEliminator(const Front& front, const EliminationOptions& options, EliminationScratch& scratch, ThreadPool* team)
      : front_(front), layout_(front_.matrix.layout), options_(options), scratch_(scratch), team_(team) {
    if (front.fault.sign == nullptr) {
      const auto order = static_cast<std::size_t>(layout_.order);
      std::vector<double>& zeros = scratch_.no_fault_vector;
      zeros.assign(3 * order, 0);
      front_.fault = {zeros.data(), zeros.data() + order, zeros.data() + 2 * order};
    }
    const std::size_t tile = std::size_t{kTileWidth} * kTileWidth;
    scratch_.tile.resize(tile);
    scratch_.inverse.resize(tile);
    scratch_.permutation.resize(kTileWidth);
    scratch_.sums.resize(kSums);
    const Index widest = std::min(front.candidates, kFrontBlock);
    const Offset needed = Offset{layout_.padded} * widest;
    if (scratch_.scaled.size() < needed) scratch_.scaled = Buffer<double>(needed);
  }

  EliminationResult run() {
    Index done = 0, limit = front_.candidates;  // [limit, candidates) failed and wait for the search
    while (done < limit) {
      const Index block = layout_.block_of(done);
      Panel panel{done, std::min(layout_.block_end(block), limit), done};
      const Index panel_end = panel.end;
      if (!take_pivots(panel)) return result_;
      update_beyond(panel, panel_end);
      done = panel.next;
      limit = set_aside_failed(done, panel_end, limit);
    }
    result_.additions = additions_beyond_ + most_in_panel_;
    result_.image_additions += std::min(front_.candidates, kTileWidth);  // in the row's own tile
    result_.eliminated = done;
    if (done < front_.candidates) {
      result_.eliminated = eliminate_by_search(front_, done, options_, scratch_, team_, result_);
    }
    return result_;
  }

 private:
  /// First column whose rows must follow an interchange when columns before `next` are eliminated.
  Index first_live(Index next) const { return options_.keep_factor ? 0 : next; }
  double* tile() { return scratch_.tile.data(); }
  double* inverse() { return scratch_.inverse.data(); }
  double* scaled(const Panel& panel, Index row, Index column) {
    return scratch_.scaled.data() + Offset{column - panel.begin} * leading_scaled(panel) + (row - panel.begin);
  }
  Index leading_scaled(const Panel& panel) const { return layout_.padded - panel.begin / 8 * 8; }
  Index leading(const Panel& panel) const { return layout_.leading_dimension(layout_.block_of(panel.begin)); }
  PivotArrays pivots_at(Index column) const {
    return {front_.pivots.diagonal + column, front_.pivots.off_diagonal + column, front_.pivots.kind + column};
  }

  /// Takes tiles until every column of the panel is a pivot or has failed. False: stopped or not finite.
  bool take_pivots(Panel& panel) {
    const Index full_end = panel.end;
    Index additions = 0;
    while (panel.next < panel.end) {
      const Index width = std::min(kTileWidth, panel.end - panel.next);
      const Index accepted = take_tile(panel, width, full_end);
      if (result_.stopped || result_.not_finite) return false;
      additions += additions_of_a_product(accepted);
      const Index failed = width - accepted;
      panel.next += accepted;
      // Failed columns change places with the last ones of the panel that have not been tried.
      for (Index k = 0; k < failed; ++k) {
        const Index from = panel.next + failed - 1 - k, to = panel.end - 1 - k;
        if (from < to) swap_symmetric(front_, from, to, first_live(panel.next));
      }
      panel.end -= failed;
    }
    most_in_panel_ = std::max(most_in_panel_, additions);
    return true;
  }

  void load_tile(Index at, Index width) {
    for (Index j = 0; j < width; ++j) {
      const double* source = front_.matrix.column(at + j, at + j);
      std::copy(source, source + (width - j), tile() + Offset{j} * kTileWidth + j);
    }
  }

  /// Factors the diagonal tile; interchanges are applied to the whole front. Returns the pivots found.
  Index factor_tile(Index at, Index width) {
    load_tile(at, width);
    const double limit = 1 / options_.threshold;
    Index found = kernels().factor_tile(tile(), kTileWidth, width, options_.definite, limit, pivots_at(at));
    if (found == width || options_.definite) return found;
    load_tile(at, width);
    Index* permutation = scratch_.permutation.data();
    found = kernels().factor_tile_pivoted(tile(), kTileWidth, width, pivots_at(at), permutation);
    Index place[kTileWidth], holds[kTileWidth];
    for (Index k = 0; k < width; ++k) place[k] = holds[k] = k;
    for (Index k = 0; k < width; ++k) {
      const Index from = place[permutation[k]];
      if (from == k) continue;
      swap_symmetric(front_, at + k, at + from, first_live(at));
      std::swap(holds[k], holds[from]);
      place[holds[k]] = k;
      place[holds[from]] = from;
    }
    return found;
  }

  /// First of `found` columns whose multipliers below the tile are too large, given the largest |w| of each.
  Index accept(Index at, Index found, const double* largest) {
    const double limit = 1 / options_.threshold;
    const PivotArrays pivots = pivots_at(at);
    for (Index k = 0; k < found; ++k) {
      if (pivots.kind[k] == PivotKind::kTwoFirst) {
        const double a = pivots.diagonal[k], b = pivots.off_diagonal[k], c = pivots.diagonal[k + 1];
        const double determinant = std::fabs(b) * std::fabs(b * (1 - (a / b) * (c / b)));
        const double first = std::fabs(c) * largest[k] + std::fabs(b) * largest[k + 1];
        const double second = std::fabs(b) * largest[k] + std::fabs(a) * largest[k + 1];
        if (!(std::max(first, second) <= limit * determinant)) return k;
        ++k;
      } else if (!(largest[k] <= limit * std::fabs(pivots.diagonal[k]))) {
        return k;
      }
    }
    return found;
  }

  Index pieces_below(Index row) const { return (layout_.order - row + kTileRows - 1) / kTileRows; }

  /// W = A21 L11^-T piece by piece; returns how many of the `found` pivots are accepted.
  Index multiply_and_accept(const Panel& panel, Index below, Index found) {
    const Index at = panel.next, pieces = pieces_below(below);
    auto& parts = scratch_.column_parts;
    parts.resize(std::max<std::size_t>(parts.size(), static_cast<std::size_t>(pieces) * kSums));
    for_each_piece(team_, pieces, [&](Offset piece) {
      const Index row = below + static_cast<Index>(piece) * kTileRows;
      const Index rows = std::min(kTileRows, layout_.order - row);
      double* w = scaled(panel, row, at);
      gemm_nt(rows, found, found, 1.0, front_.matrix.column(row, at), leading(panel), inverse(), kTileWidth, 0.0, w,
              leading_scaled(panel));
      kernels().column_abs_max(w, leading_scaled(panel), rows, found, parts.data() + piece * kTileWidth);
    });
    double largest[kTileWidth] = {};
    for (Index piece = 0; piece < pieces; ++piece) {
      for (Index k = 0; k < found; ++k) {
        largest[k] = std::max(largest[k], parts[static_cast<std::size_t>(piece) * kTileWidth + static_cast<std::size_t>(k)]);
      }
    }
    if (!options_.definite) return accept(at, found, largest);
    for (Index k = 0; k < found; ++k) {
      if (!std::isfinite(largest[k])) result_.not_finite = true;
    }
    return found;
  }

  /// Overwrites A21 by L = W D^-1 and adds up what the bounds need: column sums of |L| and of L with signs, of |A21|
  /// (the operand that was multiplied), and its weighted row sums into the row bounds.
  void divide(const Panel& panel, Index below, Index accepted, const double* weight) {
    const Index at = panel.next, pieces = pieces_below(below);
    auto& parts = scratch_.column_parts;
    std::fill_n(parts.begin(), static_cast<std::size_t>(pieces) * kSums, 0.0);
    for_each_piece(team_, pieces, [&](Offset piece) {
      const Index row = below + static_cast<Index>(piece) * kTileRows;
      const Index rows = std::min(kTileRows, layout_.order - row);
      double* part = parts.data() + piece * kSums;
      double* a = front_.matrix.column(row, at);
      kernels().weighted_abs_sums(a, leading(panel), rows, accepted, weight, front_.row_error + row, part + kOperand);
      kernels().divide_by_pivots(scaled(panel, row, at), leading_scaled(panel), a, leading(panel), rows, accepted,
                                 pivots_at(at), front_.fault.sign + row, part + kSizes, part + kSigned);
    });
    for (Index piece = 0; piece < pieces; ++piece) {
      const double* part = parts.data() + Offset{piece} * kSums;
      for (Index k = 0; k < kSums; ++k) scratch_.sums[static_cast<std::size_t>(k)] += part[k];
    }
  }

  /// weight[k] = 2 gamma sum_j (|X|^T |L11|^T)_kj: what multiplying by the inverted tile X may add to a row of A21.
  void inverse_weights(Index accepted, double* column_sum_l, double* weight) {
    const double gamma = 2 * (accepted + 2) * kUnit;
    for (Index k = 0; k < accepted; ++k) {
      double sum = 1;
      for (Index i = k + 1; i < accepted; ++i) sum += std::fabs(tile()[i + Offset{k} * kTileWidth]);
      column_sum_l[k] = sum;
    }
    for (Index k = 0; k < accepted; ++k) {
      double sum = 0;
      for (Index i = k; i < accepted; ++i) sum += std::fabs(inverse()[i + Offset{k} * kTileWidth]) * column_sum_l[i];
      weight[k] = gamma * sum;
    }
  }

  /// The same errors seen from the columns of the tile: row_error[j] += 2 gamma (s^T |X|^T |L11|^T)_j.
  void add_column_errors(Index at, Index accepted, const double* operand_sums) {
    const double gamma = 2 * (accepted + 2) * kUnit;
    double through[kTileWidth];
    for (Index i = 0; i < accepted; ++i) {
      through[i] = 0;
      for (Index k = 0; k <= i; ++k) through[i] += operand_sums[k] * std::fabs(inverse()[i + Offset{k} * kTileWidth]);
    }
    for (Index j = 0; j < accepted; ++j) {
      double sum = through[j];
      for (Index i = 0; i < j; ++i) sum += through[i] * std::fabs(tile()[j + Offset{i} * kTileWidth]);
      front_.row_error[at + j] += gamma * sum;
    }
  }

  /// Writes L11 into the front, and the W rows of the tile's columns that were not accepted.
  void store_tile(const Panel& panel, Index width, Index accepted) {
    const Index at = panel.next;
    const double* sign = front_.fault.sign + at;
    double* sums = scratch_.sums.data();
    for (Index k = 0; k < accepted; ++k) {
      const double* source = tile() + Offset{k} * kTileWidth;
      double* target = front_.matrix.column(at, at + k);
      double size = 1, signed_sum = sign[k];
      for (Index i = k + 1; i < width; ++i) {
        target[i] = source[i];
        size += std::fabs(source[i]);
        signed_sum += source[i] * sign[i];
      }
      target[k] = 1;
      sums[kSizes + k] += size;
      sums[kSigned + k] += signed_sum;
      for (Index i = accepted; i < width; ++i) *scaled(panel, at + i, at + k) = tile()[k + Offset{i} * kTileWidth];
    }
  }

  /// growth += |L| |D| (|L|^T e) and image += L D (L^T x) for the accepted columns.
  void add_growth_and_image(const Panel& panel, Index width, Index accepted) {
    const Index at = panel.next, below = at + width;
    const PivotArrays pivots = pivots_at(at);
    double weight[kTileWidth], step[kTileWidth];
    const double *g = scratch_.sums.data() + kSizes, *z = scratch_.sums.data() + kSigned;
    for (Index k = 0; k < accepted; ++k) {
      weight[k] = std::fabs(pivots.diagonal[k]) * g[k];
      step[k] = pivots.diagonal[k] * z[k];
      if (pivots.kind[k] == PivotKind::kOne) continue;
      const Index partner = pivots.kind[k] == PivotKind::kTwoFirst ? k + 1 : k - 1;
      const double b = pivots.off_diagonal[std::min(k, partner)];
      weight[k] += std::fabs(b) * g[partner];
      step[k] += b * z[partner];
    }
    double *growth = front_.growth + at, *image = front_.fault.image + at;
    for (Index k = 0; k < accepted; ++k) {
      const double* column = tile() + Offset{k} * kTileWidth;
      growth[k] += weight[k];
      image[k] += step[k];
      for (Index i = k + 1; i < width; ++i) {
        growth[i] += std::fabs(column[i]) * weight[k];
        image[i] += column[i] * step[k];
      }
    }
    const Index pieces = pieces_below(below);
    for_each_piece(team_, pieces, [&](Offset piece) {
      const Index row = below + static_cast<Index>(piece) * kTileRows;
      const Index rows = std::min(kTileRows, layout_.order - row);
      kernels().add_growth_and_image(front_.matrix.column(row, at), leading(panel), rows, accepted, weight, step,
                                     front_.growth + row, front_.fault.image + row);
    });
    result_.sign_sum_depth = std::max(
        result_.sign_sum_depth, width + pieces + 1 + signed_sum_depth(std::min(kTileRows, layout_.order - below)));
    // A row of the tile that stays gets its products one by one.
    result_.image_additions += accepted < width ? accepted : image_additions(accepted);
  }

  /// Eliminates up to `width` columns at panel.next and updates the rest of the panel. Returns how many.
  Index take_tile(const Panel& panel, Index width, Index full_end) {
    const Index at = panel.next, below = at + width;
    const Index found = factor_tile(at, width);
    if (options_.definite && found < width) {
      result_.not_finite = !std::isfinite(tile()[found + Offset{found} * kTileWidth]);
      result_.stopped = !result_.not_finite;
      return 0;
    }
    if (found == 0) return 0;
    Index accepted = found;
    if (below < layout_.order) {
      kernels().invert_unit_lower(tile(), kTileWidth, found, inverse(), kTileWidth);
      accepted = multiply_and_accept(panel, below, found);
      if (result_.not_finite || accepted == 0) return 0;
    }
    std::fill(scratch_.sums.begin(), scratch_.sums.end(), 0.0);
    if (below < layout_.order) {
      double column_sum_l[kTileWidth], weight[kTileWidth];
      inverse_weights(accepted, column_sum_l, weight);
      divide(panel, below, accepted, weight);
      add_column_errors(at, accepted, scratch_.sums.data() + kTileWidth);
    }
    store_tile(panel, width, accepted);
    add_growth_and_image(panel, width, accepted);
    for (Index k = 0; k < accepted; ++k) result_.two_by_two += front_.pivots.kind[at + k] == PivotKind::kTwoFirst;
    result_.longest_sum = std::max(result_.longest_sum, accepted);
    const Index rest = at + accepted;
    update_trailing(front_.matrix,
                    {front_.matrix.column(rest, at), leading(panel), scaled(panel, rest, at), leading_scaled(panel),
                     rest, accepted},
                    rest, full_end, team_);
    return accepted;
  }

  void update_beyond(const Panel& panel, Index panel_end) {
    const Index count = panel.next - panel.begin;
    if (count == 0 || panel_end >= layout_.order) return;
    result_.longest_sum = std::max(result_.longest_sum, count);
    additions_beyond_ += additions_of_a_product(count);
    update_trailing(front_.matrix,
                    {front_.matrix.column(panel_end, panel.begin), leading(panel), scaled(panel, panel_end, panel.begin),
                     leading_scaled(panel), panel_end, count},
                    panel_end, layout_.order, team_);
  }

  /// Columns [done, panel_end) failed: put untried candidates from the end in their places. Returns the new limit.
  Index set_aside_failed(Index done, Index panel_end, Index limit) {
    const Index failed = panel_end - done;
    const Index replaced = std::min(failed, limit - panel_end);
    for (Index k = 0; k < replaced; ++k) {
      swap_symmetric(front_, done + k, limit - 1 - k, first_live(done));
    }
    return limit - failed;
  }

  Front front_;
  const BlockLayout& layout_;
  const EliminationOptions& options_;
  EliminationScratch& scratch_;
  ThreadPool* team_;
  EliminationResult result_;
  Index additions_beyond_ = 0;  ///< to entries beyond the panels, over all panels
  Index most_in_panel_ = 0;     ///< to entries of one panel, by its own tiles
};

}  // namespace

void swap_symmetric(const Front& front, Index i, Index j, Index first_kept_column) {
  if (i == j) return;
  if (i > j) std::swap(i, j);
  const BlockLower& m = front.matrix;
  for (Index k = first_kept_column; k < i; ++k) std::swap(m.at(i, k), m.at(j, k));
  std::swap(m.at(i, i), m.at(j, j));
  for (Index k = i + 1; k < j; ++k) std::swap(m.at(k, i), m.at(j, k));
  for (Index k = j + 1; k < m.layout.order; ++k) std::swap(m.at(k, i), m.at(k, j));
  std::swap(front.label[i], front.label[j]);
  std::swap(front.row_error[i], front.row_error[j]);
  std::swap(front.growth[i], front.growth[j]);
  if (front.fault.sign == nullptr) return;
  for (double* values : {front.fault.sign, front.fault.image, front.fault.error}) std::swap(values[i], values[j]);
}

EliminationResult eliminate_front(const Front& front, const EliminationOptions& options, EliminationScratch& scratch,
                                  ThreadPool* team) {
  return FrontEliminator(front, options, scratch, team).run();
}

}  // namespace stanchion
