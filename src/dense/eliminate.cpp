#include "dense/eliminate.hpp"

#include <algorithm>
#include <cmath>

namespace stanchion {
namespace {

constexpr Index kWorthAnotherPass = 64;    ///< another pass if the last one took more than one of so many
constexpr Index kPieceRows = kFrontBlock;  ///< rows beyond the panel handled as one piece
// Parts of the sums over columns of a tile: of |L|, of |A21|, of L with the signs of the fault vector; the
// largest |w|.
constexpr Index kSizes = 0, kOperand = kTileWidth, kSigned = 2 * kTileWidth, kSums = 3 * kTileWidth;
constexpr Index kLargest = kSums, kParts = 4 * kTileWidth;

/// One column block of the front while its pivots are taken.
struct Panel {
  Index begin;     ///< first column
  Index end;       ///< end of the columns in this block that may still be pivots
  Index next;      ///< first column not yet eliminated
  Index full_end;  ///< end of the columns in this block that were candidates at first
};

/// Sum of term(i) over [begin, end), in eight parts that do not wait for each other.
template <class Scalar, class Term>
Scalar sum_in_parts(Index begin, Index end, const Term& term) {
  constexpr Index kSumParts = 8;
  Scalar part[kSumParts] = {};
  Index i = begin;
  for (; i + kSumParts <= end; i += kSumParts) {
    for (Index p = 0; p < kSumParts; ++p) part[p] += term(i + p);
  }
  for (Index p = 0; i + p < end; ++p) part[p] += term(i + p);
  return ((part[0] + part[1]) + (part[2] + part[3])) + ((part[4] + part[5]) + (part[6] + part[7]));
}

template <class Scalar>
class FrontEliminator {
 public:
  FrontEliminator(const FrontOf<Scalar>& front, const EliminationOptions& options,
                  EliminationScratchOf<Scalar>& scratch, ThreadPool* team)
      : front_(front),
        layout_(front_.matrix.layout),
        options_(options),
        scratch_(scratch),
        beyond_(scratch.beyond),
        inside_(scratch.inside),
        team_(team) {
    if (front.fault.sign == nullptr) {
      const auto order = static_cast<std::size_t>(layout_.order);
      std::vector<Scalar>& zeros = scratch_.no_fault_vector;
      zeros.assign(3 * order, 0);
      front_.fault = {zeros.data(), zeros.data() + order, zeros.data() + 2 * order};
    }
    const std::size_t tile = std::size_t{kTileWidth} * kTileWidth;
    scratch_.tile.resize(tile);
    scratch_.inverse.resize(tile);
    scratch_.factor.resize(tile);
    scratch_.permutation.resize(kTileWidth);
    scratch_.sums.resize(kSums);
  }

  EliminationResult run() {
    Index done = 0, limit = front_.candidates;
    bool search_may_help = true;
    for (Index before = -1;; before = done) {
      if (!take_panels(done, limit)) return result_;
      // What failed is tried again beside its partners while that takes a good part of it.
      const Index left = front_.candidates - done;
      if (left == 0 || (before >= 0 && done - before <= left / kWorthAnotherPass)) break;
      const PairedCandidates paired = pair_up(front_, done, options_.threshold, first_live(done));
      limit = paired.end;
      if (limit == done) {  // nor would the search find a partner; at a root it makes do with less
        search_may_help = paired.zero_columns || front_.candidates == layout_.order;
        break;
      }
    }
    result_.additions = additions_beyond_ + additions_inside_;
    result_.image_additions += std::min(front_.candidates, kTileWidth);  // in the row's own tile
    result_.eliminated = done;
    if (done < front_.candidates && search_may_help) {
      result_.eliminated = eliminate_by_search(front_, done, options_, scratch_, team_, result_);
    }
    return result_;
  }

 private:
  static const KernelSet<Scalar>& kernels() { return kernels_of<Scalar>(); }
  /// First column whose rows must follow an interchange when columns before `next` are eliminated.
  Index first_live(Index next) const { return options_.keep_factor ? 0 : next; }
  Scalar* tile() { return scratch_.tile.data(); }
  Scalar* inverse() { return scratch_.inverse.data(); }
  Index leading(const Panel& panel) const { return layout_.leading_dimension(layout_.block_of(panel.begin)); }
  PivotArrays pivots_at(Index column) const {
    return {front_.pivots.diagonal + column, front_.pivots.off_diagonal + column,
            front_.pivots.kind + column};
  }

  /// Takes panels from column `done` on until all columns before `limit` are pivots or have failed; those are
  /// at the end. False: stopped or not finite.
  bool take_panels(Index& done, Index limit) {
    most_in_panel_ = 0;
    while (done < limit) {
      const Index block = layout_.block_of(done);
      const Index panel_end = std::min(layout_.block_end(block), limit);
      Panel panel{done, panel_end, done, panel_end};
      beyond_.reset(strip_begin<Scalar>(panel_end), layout_.order, panel_end - done);
      if (!take_pivots(panel)) return false;
      update_beyond(panel);
      done = panel.next;
      limit = set_aside_failed(done, panel_end, limit);
    }
    additions_inside_ += most_in_panel_;
    return true;
  }

  /// Takes tiles until every column of the panel is a pivot or has failed. False: stopped or not finite.
  bool take_pivots(Panel& panel) {
    Index additions = 0;
    while (panel.next < panel.end) {
      const Index width = std::min(kTileWidth, panel.end - panel.next);
      const Index accepted = take_tile(panel, width);
      if (result_.stopped || result_.not_finite) return false;
      ++additions;
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
      const Scalar* source = front_.matrix.column(at + j, at + j);
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
  Index accept(Index at, Index found, const Scalar* largest) {
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

  // The rows below a tile are worked on in pieces: piece 0 is the rest of the panel, from `below` on; the
  // others lie beyond it, from the first strip of beyond_ on.
  struct PieceRows {
    Index begin, end;
    bool inside;
  };
  Offset pieces(const Panel& panel) const {
    if (panel.full_end == layout_.order) return 1;
    return 1 + (layout_.order - strip_begin<Scalar>(panel.full_end) + kPieceRows - 1) / kPieceRows;
  }
  PieceRows rows_of(const Panel& panel, Index below, Offset piece) const {
    if (piece == 0) return {below, panel.full_end, true};
    const Index begin = strip_begin<Scalar>(panel.full_end) + static_cast<Index>(piece - 1) * kPieceRows;
    return {begin, std::min(begin + kPieceRows, layout_.order), false};
  }
  /// W of a piece: the operand and how far its strips lie apart.
  Scalar* scaled(const Panel& panel, const PieceRows& rows) {
    return rows.inside ? inside_.right(0, 0) : beyond_.right(rows.begin, panel.next - panel.begin);
  }
  Scalar* lower(const Panel& panel, const PieceRows& rows) {
    return rows.inside ? inside_.left(0, 0) : beyond_.left(rows.begin, panel.next - panel.begin);
  }
  Index scaled_stride(const PieceRows& rows) const {
    return rows.inside ? inside_.right_stride() : beyond_.right_stride();
  }
  Index lower_stride(const PieceRows& rows) const {
    return rows.inside ? inside_.left_stride() : beyond_.left_stride();
  }
  Scalar* part(Offset piece) { return scratch_.column_parts.data() + piece * kParts; }

  /// W = A21 L11^-T of one piece, and the largest |w| of each column.
  void multiply_piece(const Panel& panel, const PieceRows& rows, Index found, Scalar* largest) {
    Scalar* w = scaled(panel, rows);
    const Index stride = scaled_stride(rows), count = rows.end - rows.begin;
    kernels().multiply_by_upper(front_.matrix.column(rows.begin, panel.next), leading(panel), count,
                                scratch_.factor.data(), found, w, stride);
    // Rows of the panel that share the first strip beyond it.
    const Index strip = kernels().column_strip;
    for (Index i = 0; !rows.inside && i < panel.full_end - rows.begin; ++i) {
      for (Index k = 0; k < found; ++k) w[Offset{i / strip} * stride + Offset{k} * strip + i % strip] = 0;
    }
    kernels().strips_abs_max(w, stride, count, found, largest);
  }

  /// W of all rows below; returns how many of the `found` pivots are accepted.
  Index multiply_and_accept(const Panel& panel, Index below, Index found) {
    const Offset count = pieces(panel);
    auto& parts = scratch_.column_parts;
    parts.resize(std::max(parts.size(), static_cast<std::size_t>(count) * kParts));
    for_each_piece(team_, count, [&](Offset piece) {
      multiply_piece(panel, rows_of(panel, below, piece), found, part(piece) + kLargest);
    });
    Scalar largest[kTileWidth] = {};
    for (Offset piece = 0; piece < count; ++piece) {
      for (Index k = 0; k < found; ++k) largest[k] = std::max(largest[k], part(piece)[kLargest + k]);
    }
    if (!options_.definite) return accept(panel.next, found, largest);
    for (Index k = 0; k < found; ++k) {
      if (!std::isfinite(largest[k])) result_.not_finite = true;
    }
    return found;
  }

  /// L = W D^-1 for all rows below, and the sums that the bounds need: column sums of |L| and of L with
  /// signs, of |A21| (the operand that was multiplied), and its weighted row sums into the row bounds.
  void divide(const Panel& panel, Index below, Index accepted, const Scalar* weight) {
    const Index at = panel.next;
    const Offset count = pieces(panel);
    for_each_piece(team_, count, [&](Offset piece) {
      const PieceRows rows = rows_of(panel, below, piece);
      Scalar* sums = part(piece);
      std::fill_n(sums, kSums, Scalar{0});
      const Index first = rows.inside ? rows.begin : std::max(rows.begin, panel.full_end);
      kernels().weighted_abs_sums(front_.matrix.column(first, at), leading(panel), rows.end - first, accepted,
                                  weight, front_.row_error + first, sums + kOperand);
      // Rows of the panel are needed in the front while its pivots are taken; others only when they are kept.
      Scalar* plain = rows.inside ? front_.matrix.column(rows.begin, at) : nullptr;
      kernels().divide_strips(scaled(panel, rows), scaled_stride(rows), rows.end - rows.begin, accepted,
                              pivots_at(at), front_.fault.sign + rows.begin, lower(panel, rows),
                              lower_stride(rows), plain, leading(panel), sums + kSizes, sums + kSigned);
      if (options_.keep_factor && !rows.inside) unpack_lower(panel, first, rows, accepted);
    });
    for (Offset piece = 0; piece < count; ++piece) {
      for (Index k = 0; k < kSums; ++k) scratch_.sums[static_cast<std::size_t>(k)] += part(piece)[k];
    }
  }

  /// Writes rows [first, rows.end) of the new columns of L into the front.
  void unpack_lower(const Panel& panel, Index first, const PieceRows& rows, Index accepted) {
    const Index strip = kernels().row_strip;
    const Scalar* packed = lower(panel, rows);
    for (Index k = 0; k < accepted; ++k) {
      Scalar* target = front_.matrix.column(first, panel.next + k);
      for (Index i = first; i < rows.end; ++i) {
        const Index r = i - rows.begin;
        target[i - first] = packed[Offset{r / strip} * lower_stride(rows) + Offset{k} * strip + r % strip];
      }
    }
  }

  /// weight[k] = 2 gamma sum_j (|X|^T |L11|^T)_kj: what multiplying by the inverted tile X may add to a row
  /// of A21.
  void inverse_weights(Index accepted, Scalar* column_sum_l, Scalar* weight) {
    const auto gamma = static_cast<Scalar>(2 * (accepted + 2) * Rounding<Scalar>::kUnit);
    for (Index k = 0; k < accepted; ++k) {
      const Scalar* column = tile() + Offset{k} * kTileWidth;
      column_sum_l[k] =
          1 + sum_in_parts<Scalar>(k + 1, accepted, [column](Index i) { return std::fabs(column[i]); });
    }
    for (Index k = 0; k < accepted; ++k) {
      const Scalar* column = inverse() + Offset{k} * kTileWidth;
      weight[k] = gamma * sum_in_parts<Scalar>(k, accepted, [column, column_sum_l](Index i) {
                    return std::fabs(column[i]) * column_sum_l[i];
                  });
    }
  }

  /// The same errors seen from the columns of the tile: row_error[j] += 2 gamma (s^T |X|^T |L11|^T)_j.
  void add_column_errors(Index at, Index accepted, const Scalar* operand_sums) {
    const auto gamma = static_cast<Scalar>(2 * (accepted + 2) * Rounding<Scalar>::kUnit);
    Scalar through[kTileWidth] = {}, sum[kTileWidth];
    for (Index k = 0; k < accepted; ++k) {
      const Scalar* column = inverse() + Offset{k} * kTileWidth;
      for (Index i = k; i < accepted; ++i) through[i] += operand_sums[k] * std::fabs(column[i]);
    }
    std::copy_n(through, accepted, sum);
    for (Index i = 0; i < accepted; ++i) {
      const Scalar* column = tile() + Offset{i} * kTileWidth;
      for (Index j = i + 1; j < accepted; ++j) sum[j] += through[i] * std::fabs(column[j]);
    }
    for (Index j = 0; j < accepted; ++j) front_.row_error[at + j] += gamma * sum[j];
  }

  /// Writes L11 into the front.
  void store_tile(Index at, Index width, Index accepted) {
    const Scalar* sign = front_.fault.sign + at;
    Scalar* sums = scratch_.sums.data();
    for (Index k = 0; k < accepted; ++k) {
      const Scalar* source = tile() + Offset{k} * kTileWidth;
      Scalar* target = front_.matrix.column(at, at + k);
      target[k] = 1;
      std::copy(source + k + 1, source + width, target + k + 1);
      sums[kSizes + k] +=
          1 + sum_in_parts<Scalar>(k + 1, width, [source](Index i) { return std::fabs(source[i]); });
      sums[kSigned + k] += sign[k] + sum_in_parts<Scalar>(k + 1, width, [source, sign](Index i) {
                             return source[i] * sign[i];
                           });
    }
  }

  /// growth += |L| |D| (|L|^T e) and image += L D (L^T x) for the accepted columns, in the rows of the tile.
  void add_growth_and_image(const Panel& panel, Index width, Index accepted) {
    const Index at = panel.next;
    const PivotArrays pivots = pivots_at(at);
    Scalar weight[kTileWidth], step[kTileWidth];
    const Scalar *g = scratch_.sums.data() + kSizes, *z = scratch_.sums.data() + kSigned;
    for (Index k = 0; k < accepted; ++k) {
      const auto d = static_cast<Scalar>(pivots.diagonal[k]);
      weight[k] = std::fabs(d) * g[k];
      step[k] = d * z[k];
      if (pivots.kind[k] == PivotKind::kOne) continue;
      const Index partner = pivots.kind[k] == PivotKind::kTwoFirst ? k + 1 : k - 1;
      const auto b = static_cast<Scalar>(pivots.off_diagonal[std::min(k, partner)]);
      weight[k] += std::fabs(b) * g[partner];
      step[k] += b * z[partner];
    }
    Scalar *growth = front_.growth + at, *image = front_.fault.image + at;
    for (Index k = 0; k < accepted; ++k) {
      const Scalar* column = tile() + Offset{k} * kTileWidth;
      growth[k] += weight[k];
      image[k] += step[k];
      for (Index i = k + 1; i < width; ++i) {
        growth[i] += std::fabs(column[i]) * weight[k];
        image[i] += column[i] * step[k];
      }
    }
    result_.sign_sum_depth = std::max(
        result_.sign_sum_depth, width + static_cast<Index>(pieces(panel)) + 1 + signed_sum_depth(kPieceRows));
    // A row of the tile that stays gets its products one by one.
    result_.image_additions += accepted < width ? accepted : image_additions(accepted);
    for (Index k = 0; k < accepted; ++k) {
      weight_[k] = weight[k];
      step_[k] = step[k];
    }
  }

  /// The rest of the panel as operands from `rest` on, when columns of the tile itself stay behind: their W
  /// is in the upper part of the tile.
  void repack_inside(const Panel& panel, Index width, Index accepted) {
    const Index at = panel.next, rest = at + accepted, below = at + width, rows = panel.full_end - rest;
    std::vector<Scalar>& w = scratch_.repacked;
    w.resize(std::max(w.size(), static_cast<std::size_t>(rows) * static_cast<std::size_t>(accepted)));
    const Index strip = kernels().column_strip;
    for (Index k = 0; k < accepted; ++k) {
      Scalar* target = w.data() + Offset{k} * rows;
      for (Index i = accepted; i < width; ++i) target[i - accepted] = tile()[k + Offset{i} * kTileWidth];
      for (Index i = below; i < panel.full_end; ++i) {
        const Index r = i - below;
        target[i - rest] =
            inside_.right(0, 0)[Offset{r / strip} * inside_.right_stride() + Offset{k} * strip + r % strip];
      }
    }
    inside_.reset(0, rows, kTileWidth);
    kernels().pack_left(front_.matrix.column(rest, at), leading(panel), rows, accepted, inside_.left(0, 0),
                        inside_.left_stride());
    kernels().pack_right(w.data(), rows, rows, accepted, inside_.right(0, 0), inside_.right_stride());
  }

  /// Takes the accepted columns out of the rest of the panel, and adds their growth and image below it.
  void update_panel(const Panel& panel, Index width, Index accepted) {
    const Index at = panel.next, below = at + width, rest = at + accepted;
    const PieceRows first = rows_of(panel, below, 0);
    if (first.end > first.begin) {
      kernels().strips_growth_and_image(lower(panel, first), lower_stride(first), first.end - first.begin,
                                        accepted, weight_, step_, front_.growth + below,
                                        front_.fault.image + below);
    }
    if (accepted < width) repack_inside(panel, width, accepted);
    const Index columns = panel.full_end - rest;
    const auto update = [&](const PieceRows& rows, Index begin, Index end) {
      if (begin >= end || columns == 0) return;
      kernels().subtract_product(lower(panel, {begin, end, rows.inside}), lower_stride(rows),
                                 inside_.right(0, 0), inside_.right_stride(), accepted, end - begin, columns,
                                 begin - rest, 0, front_.matrix.column(begin, rest), leading(panel));
    };
    // A strip beyond may hold rows of the panel: it goes with them, for it writes to them too. Strips before
    // it, where they are shorter than the longest, hold nothing but zeros.
    const Index rows_before = panel.full_end - strip_begin<Scalar>(panel.full_end);
    const Index shared = panel.full_end - rows_before % kernels().row_strip;
    const Index shared_end =
        shared < panel.full_end ? std::min(shared + kernels().row_strip, layout_.order) : shared;
    for_each_piece(team_, pieces(panel), [&](Offset piece) {
      const PieceRows rows = rows_of(panel, below, piece);
      if (rows.inside) {
        update(rows, rest, panel.full_end);
        if (pieces(panel) > 1) update({shared, shared_end, false}, shared, shared_end);
        return;
      }
      update(rows, std::max(rows.begin, shared_end), rows.end);
      kernels().strips_growth_and_image(lower(panel, rows), lower_stride(rows), rows.end - rows.begin,
                                        accepted, weight_, step_, front_.growth + rows.begin,
                                        front_.fault.image + rows.begin);
    });
  }

  /// Eliminates up to `width` columns at panel.next and updates the rest of the panel. Returns how many.
  Index take_tile(const Panel& panel, Index width) {
    const Index at = panel.next, below = at + width;
    const Index found = factor_tile(at, width);
    if (options_.definite && found < width) {
      result_.not_finite = !std::isfinite(tile()[found + Offset{found} * kTileWidth]);
      result_.stopped = !result_.not_finite;
      return 0;
    }
    if (found == 0) return 0;
    inside_.reset(0, panel.full_end - below, kTileWidth);
    Index accepted = found;
    if (below < layout_.order) {
      kernels().invert_unit_lower(tile(), kTileWidth, found, inverse(), kTileWidth);
      kernels().pack_right(inverse(), kTileWidth, found, found, scratch_.factor.data(),
                           kTileWidth * kernels().column_strip);
      accepted = multiply_and_accept(panel, below, found);
      if (result_.not_finite || accepted == 0) return 0;
    }
    std::fill(scratch_.sums.begin(), scratch_.sums.end(), Scalar{0});
    if (below < layout_.order) {
      Scalar column_sum_l[kTileWidth], weight[kTileWidth];
      inverse_weights(accepted, column_sum_l, weight);
      divide(panel, below, accepted, weight);
      add_column_errors(at, accepted, scratch_.sums.data() + kTileWidth);
    }
    store_tile(at, width, accepted);
    add_growth_and_image(panel, width, accepted);
    for (Index k = 0; k < accepted; ++k)
      result_.two_by_two += front_.pivots.kind[at + k] == PivotKind::kTwoFirst;
    result_.longest_sum = std::max(result_.longest_sum, accepted);
    if (at + accepted < layout_.order) update_panel(panel, width, accepted);
    return accepted;
  }

  void update_beyond(const Panel& panel) {
    const Index count = panel.next - panel.begin;
    if (count == 0 || panel.full_end >= layout_.order) return;
    result_.longest_sum = std::max(result_.longest_sum, count);
    ++additions_beyond_;
    update_trailing(front_.matrix, beyond_, count, panel.full_end, team_);
  }

  /// Columns [done, panel_end) failed: put untried candidates from the end in their places. Returns the new
  /// limit.
  Index set_aside_failed(Index done, Index panel_end, Index limit) {
    const Index failed = panel_end - done;
    const Index replaced = std::min(failed, limit - panel_end);
    for (Index k = 0; k < replaced; ++k) {
      swap_symmetric(front_, done + k, limit - 1 - k, first_live(done));
    }
    return limit - failed;
  }

  FrontOf<Scalar> front_;
  const BlockLayout& layout_;
  const EliminationOptions& options_;
  EliminationScratchOf<Scalar>& scratch_;
  EliminatedColumnsOf<Scalar>&beyond_, &inside_;
  ThreadPool* team_;
  EliminationResult result_;
  Scalar weight_[kTileWidth], step_[kTileWidth];  ///< |D| |L|^T e and D L^T x of the current tile
  Index additions_beyond_ = 0;                    ///< to entries beyond the panels, over all panels
  Index most_in_panel_ = 0;                       ///< to entries of one panel, by its own tiles, of this pass
  Index additions_inside_ = 0;                    ///< the same over all passes
};

}  // namespace

template <class Scalar>
EliminationResult eliminate_front(const FrontOf<Scalar>& front, const EliminationOptions& options,
                                  EliminationScratchOf<Scalar>& scratch, ThreadPool* team) {
  return FrontEliminator<Scalar>(front, options, scratch, team).run();
}

template EliminationResult eliminate_front(const FrontOf<double>&, const EliminationOptions&,
                                           EliminationScratchOf<double>&, ThreadPool*);
template EliminationResult eliminate_front(const FrontOf<float>&, const EliminationOptions&,
                                           EliminationScratchOf<float>&, ThreadPool*);

}  // namespace stanchion
