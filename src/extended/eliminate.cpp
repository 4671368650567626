#include "extended/eliminate.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <utility>

#include "dense/trailing_update.hpp"

namespace stanchion {
namespace {

/// Pivots above this are not divided by: the tail of their reciprocal could underflow. See error_bound.md,
/// section 5.
constexpr double kMostPivot = 0x1p900;
constexpr Index kPieceRows = 256;  ///< rows updated as one piece: L of a panel then fits the second cache

/// Columns [begin, end) that may become pivots; those before `next` are.
struct Panel {
  Index begin, end, next;
  Index update_end;  ///< columns before this are updated pivot by pivot, the rest once the panel is done
};

template <class Scalar>
class Eliminator {
 public:
  Eliminator(const ScalarFront<Scalar>& front, const ScalarOptions& options, ScalarScratch& scratch,
             ThreadPool* team)
      : front_(front),
        matrix_(front.matrix),
        order_(front.matrix.layout.order),
        options_(options),
        scratch_(scratch),
        team_(team) {
    const Offset needed = ScalarTraits<Scalar>::planes * Offset{kExtendedPanel} * order_;
    if (scratch_.scaled.size() < needed) scratch_.scaled = Buffer<double>(needed);
  }

  ScalarElimination run() {
    Index done = 0, limit = front_.candidates;  // [limit, candidates) found no pivot in their panel
    while (done < limit) {
      const BlockLayout& layout = matrix_.layout;
      const Index end = std::min({done + kExtendedPanel, layout.block_end(layout.block_of(done)), limit});
      Panel panel{done, end, done, end};
      take_pivots(panel);
      if (result_.stopped || result_.not_finite) return result_;
      update_beyond(panel);
      done = panel.next;
      const Index failed = end - done, replaced = std::min(failed, limit - end);
      for (Index k = 0; k < replaced; ++k) exchange(done + k, limit - 1 - k, done, 0);
      limit -= failed;
    }
    // What is left is searched as one panel, each pivot being applied at once.
    Panel rest{done, front_.candidates, done, order_};
    take_pivots(rest);
    result_.eliminated = rest.next;
    return result_;
  }

 private:
  static double size(Scalar x) { return std::fabs(head(x)); }
  bool at_once(const Panel& panel) const { return panel.update_end == order_; }
  /// Column of W for the pivot in column `at`, addressed by row of the front.
  Strip<Scalar> scaled(const Panel& panel, Index at) {
    const Index slot = at_once(panel) ? 0 : at - panel.begin;
    return {scratch_.scaled.data() + Offset{slot} * order_, Offset{kExtendedPanel} * order_};
  }

  void take_pivots(Panel& panel) {
    while (panel.next < panel.end) {
      if (options_.definite) {
        const double d = head(matrix_.get(panel.next, panel.next));
        result_.not_finite = !(std::fabs(d) <= kMostPivot);
        result_.stopped = !result_.not_finite && !(d >= kLeastPivot);
        if (result_.not_finite || result_.stopped) return;
        take_one(panel, panel.next);
        if (result_.not_finite) return;
      } else if (!search(panel)) {
        return;
      }
    }
  }

  /// Takes the first acceptable pivot among the columns of the panel; false when there is none.
  bool search(Panel& panel) {
    for (Index q = panel.next; q < panel.end; ++q) {
      const double d = size(matrix_.get(q, q)), most = largest_beside(panel, q);
      if (d == 0 && most == 0) {
        take_zero(panel, q);
        return true;
      }
      if (d >= kLeastPivot && d <= kMostPivot && d >= options_.threshold * most) {
        take_one(panel, q);
        return true;
      }
      const Index partner = largest_candidate(panel, q);
      if (partner >= 0 && pair_fits(panel, q, partner, most)) {
        take_pair(panel, q, partner);
        return true;
      }
    }
    return false;
  }

  /// Largest entry of the live symmetric column q, its diagonal left out.
  double largest_beside(const Panel& panel, Index q) {
    double most = kernels_.largest(matrix_.column(q, q) + 1, order_ - q - 1);
    for (Index k = panel.next; k < q; ++k) {
      const double x = size(matrix_.get(q, k));
      if (!(x <= most)) most = std::isfinite(x) ? x : INFINITY;
    }
    return most;
  }

  /// Candidate of the panel with the largest entry in column q; -1 when all are zero.
  Index largest_candidate(const Panel& panel, Index q) {
    Index best = -1;
    double most = 0;
    for (Index k = panel.next; k < panel.end; ++k) {
      if (k == q) continue;
      const double x = size(matrix_.get(std::max(k, q), std::min(k, q)));
      if (x > most) {
        most = x;
        best = k;
      }
    }
    return best;
  }

  bool pair_fits(const Panel& panel, Index q, Index r, double most_q) {
    const double a = size(matrix_.get(q, q)), c = size(matrix_.get(r, r));
    const double b = size(matrix_.get(std::max(q, r), std::min(q, r)));
    if (!(b >= kLeastPivot && b <= kMostPivot)) return false;
    if (!(a <= kTwoByTwoShare * b && c <= kTwoByTwoShare * b)) return false;
    const double most_r = largest_beside(panel, r), determinant = b * (1 - (a / b) * (c / b));
    const double first = (c / b) * most_q + most_r, second = (a / b) * most_r + most_q;
    return options_.threshold * std::max(first, second) <= determinant &&
           std::isfinite(std::max(first, second));
  }

  /// Keeps column `at` as W, rows from `from` on, so that the front can hold L in its place.
  void save(Index at, Index from, const Strip<Scalar>& to) {
    const Strip<Scalar> column = matrix_.column(from, at);
    for (Index plane = 0; plane < ScalarTraits<Scalar>::planes; ++plane) {
      const double* source = column.data + plane * column.plane;
      std::copy(source, source + (order_ - from), to.data + plane * to.plane + from);
    }
  }

  void take_zero(Panel& panel, Index q) {
    move_to(panel, q, panel.next);
    const Strip<Scalar> w = scaled(panel, panel.next);
    save(panel.next, panel.next, w);  // zeros: the panel's product must not meet old scratch
    front_.kind[panel.next] = PivotKind::kZero;
    front_.diagonal[panel.next] = matrix_.get(panel.next, panel.next);
    ++panel.next;
  }

  void take_one(Panel& panel, Index q) {
    move_to(panel, q, panel.next);
    const Index at = panel.next, below = at + 1, rows = order_ - below;
    const Scalar d = matrix_.get(at, at);
    front_.kind[at] = PivotKind::kOne;
    front_.diagonal[at] = d;
    result_.largest_pivot = std::max(result_.largest_pivot, size(d));
    ++panel.next;
    if (rows == 0) {
      front_.growth[at] += size(d);
      add_image(at, matrix_.column(at, at), below, front_.sign[at] < 0 ? -d : d);
      return;
    }
    const Strip<Scalar> w = scaled(panel, at), l = matrix_.column(at, at) + 1;
    save(at, below, w);
    const double sum = 1 + kernels_.divide(w + below, l, rows, d);
    if (!std::isfinite(sum)) result_.not_finite = true;
    result_.largest_sum = std::max(result_.largest_sum, sum);
    const double weight = size(d) * sum;
    front_.growth[at] += weight;
    kernels_.add_weighted(l, rows, weight, front_.growth + below);
    add_image(at, l, below, d * sign_sum(at, l, below));
    for (Index j = below; j < panel.update_end; ++j) apply(at, j, load(w, j));
  }

  /// Entry `at` of L^T x: x there, and the column `l` of L in the rows from `below` on.
  Scalar sign_sum(Index at, const Strip<Scalar>& l, Index below) const {
    Scalar sum;
    widen(front_.sign[at], sum);
    for (Index i = below; i < order_; ++i) {
      const Scalar entry = load(l, i - below);
      sum = sum + (front_.sign[i] < 0 ? -entry : entry);
    }
    return sum;
  }

  /// image += (column of L, with a 1 in row `at`) times `weight`.
  void add_image(Index at, const Strip<Scalar>& l, Index below, Scalar weight) {
    store(front_.image, at, load(front_.image, at) + weight);
    const Scalar taken = -weight;
    kernels_.subtract_products(front_.image + below, l, 0, &taken, order_ - below, 1);
  }

  void take_pair(Panel& panel, Index q, Index r) {
    const Index at = panel.next, below = at + 2, rows = order_ - below;
    move_to(panel, q, at);
    move_to(panel, r == at ? q : r, at + 1);
    const PairPivot<Scalar> pivot{matrix_.get(at, at), matrix_.get(at + 1, at), matrix_.get(at + 1, at + 1)};
    front_.kind[at] = PivotKind::kTwoFirst;
    front_.kind[at + 1] = PivotKind::kTwoSecond;
    ++result_.two_by_two;
    result_.largest_pivot = std::max(result_.largest_pivot, size(pivot.b));
    panel.next += 2;
    double sums[2] = {0, 0};
    const Strip<Scalar> first = scaled(panel, at);
    Strip<Scalar> second = scaled(panel, at + 1);
    if (at_once(panel)) second = second + order_;
    const Strip<Scalar> l_first = matrix_.column(at, at) + 2, l_second = matrix_.column(at + 1, at + 1) + 1;
    if (rows > 0) {
      save(at, below, first);
      save(at + 1, below, second);
      kernels_.solve_pair(first + below, second + below, l_first, l_second, rows, pivot, sums);
    }
    const double a = size(pivot.a), b = size(pivot.b), c = size(pivot.c);
    const double sum_first = 1 + sums[0], sum_second = 1 + sums[1];
    result_.largest_sum = std::max({result_.largest_sum, sum_first, sum_second});
    const double weight_first = a * sum_first + b * sum_second,
                 weight_second = b * sum_first + c * sum_second;
    front_.growth[at] += weight_first;
    front_.growth[at + 1] += weight_second;
    kernels_.add_weighted(l_first, rows, weight_first, front_.growth + below);
    kernels_.add_weighted(l_second, rows, weight_second, front_.growth + below);
    const Scalar z_first = sign_sum(at, l_first, below), z_second = sign_sum(at + 1, l_second, below);
    add_image(at, l_first, below, pivot.a * z_first + pivot.b * z_second);
    add_image(at + 1, l_second, below, pivot.b * z_first + pivot.c * z_second);
    for (Index j = below; j < panel.update_end; ++j) {
      apply(at, j, load(first, j));
      apply(at + 1, j, load(second, j));
    }
  }

  /// Column j minus the multiplier column of the pivot `at` times w.
  void apply(Index at, Index j, Scalar w) {
    kernels_.subtract_products(matrix_.column(j, j), matrix_.column(j, at), 0, &w, order_ - j, 1);
  }

  /// Takes the pivots of a finished panel out of the columns beyond it.
  void update_beyond(const Panel& panel) {
    const Index count = panel.next - panel.begin, first = panel.end;
    if (count == 0 || first >= order_) return;
    const Index leading = matrix_.layout.leading_dimension(matrix_.layout.block_of(panel.begin));
    const Strip<Scalar> w = scaled(panel, panel.begin);
    for_each_piece(team_, (order_ - first + kPieceRows - 1) / kPieceRows, [&](Offset piece) {
      const Index begin = first + static_cast<Index>(piece) * kPieceRows,
                  end = std::min(begin + kPieceRows, order_);
      std::array<Scalar, kExtendedPanel> factors;
      for (Index j = first; j < end; ++j) {
        for (Index k = 0; k < count; ++k)
          factors[static_cast<std::size_t>(k)] = load(w, Offset{k} * order_ + j);
        const Index row = std::max(begin, j);
        kernels_.subtract_products(matrix_.column(row, j), matrix_.column(row, panel.begin), leading,
                                   factors.data(), end - row, count);
      }
    });
  }

  void move_to(const Panel& panel, Index from, Index to) {
    if (from == to) return;
    const bool immediate = at_once(panel);
    exchange(std::min(from, to), std::max(from, to), immediate ? panel.next : panel.begin,
             immediate ? 0 : panel.next - panel.begin);
  }

  static void swap_entries(const Strip<Scalar>& x, const Strip<Scalar>& y) {
    const Scalar kept = load(x, 0);
    store(x, 0, load(y, 0));
    store(y, 0, kept);
  }

  /// Interchanges rows and columns i < j in columns from `first` on, and in the first `saved` columns of W.
  void exchange(Index i, Index j, Index first, Index saved) {
    for (Index k = options_.keep_lower ? 0 : first; k < i; ++k)
      swap_entries(matrix_.column(i, k), matrix_.column(j, k));
    for (Index k = i + 1; k < j; ++k) swap_entries(matrix_.column(k, i), matrix_.column(j, k));
    for (Index k = j + 1; k < order_; ++k) swap_entries(matrix_.column(k, i), matrix_.column(k, j));
    swap_entries(matrix_.column(i, i), matrix_.column(j, j));
    const Strip<Scalar> w{scratch_.scaled.data(), Offset{kExtendedPanel} * order_};
    for (Index k = 0; k < saved; ++k)
      swap_entries(w + (Offset{k} * order_ + i), w + (Offset{k} * order_ + j));
    std::swap(front_.label[i], front_.label[j]);
    std::swap(front_.row_error[i], front_.row_error[j]);
    std::swap(front_.growth[i], front_.growth[j]);
    std::swap(front_.sign[i], front_.sign[j]);
    swap_entries(front_.image + i, front_.image + j);
    std::swap(front_.image_error[i], front_.image_error[j]);
  }

  const ScalarFront<Scalar>& front_;
  const ScalarBlock<Scalar>& matrix_;
  Index order_;
  const ScalarOptions& options_;
  ScalarScratch& scratch_;
  ThreadPool* team_;
  const ScalarKernels<Scalar>& kernels_ = scalar_kernels<Scalar>();
  ScalarElimination result_;
};

}  // namespace

template <class Scalar>
ScalarElimination eliminate_scalar_front(const ScalarFront<Scalar>& front, const ScalarOptions& options,
                                         ScalarScratch& scratch, ThreadPool* team) {
  return Eliminator<Scalar>(front, options, scratch, team).run();
}

template ScalarElimination eliminate_scalar_front(const ScalarFront<double>&, const ScalarOptions&,
                                                  ScalarScratch&, ThreadPool*);
template ScalarElimination eliminate_scalar_front(const ScalarFront<DoubleDouble>&, const ScalarOptions&,
                                                  ScalarScratch&, ThreadPool*);

}  // namespace stanchion
