// Threshold partial pivoting column by column, for the few candidates that the tiles could not take.
#include <algorithm>
#include <cmath>

#include "dense/eliminate.hpp"

namespace stanchion {
namespace {

struct ColumnMaxima {
  double largest = 0;    ///< over all rows but the diagonal (and `skip`)
  double candidate = 0;  ///< over candidate rows only
  Index candidate_row = -1;
  bool finite = true;
};

template <class Scalar>
class SearchEliminator {
 public:
  SearchEliminator(const FrontOf<Scalar>& front, Index from, const EliminationOptions& options,
                   EliminationScratchOf<Scalar>& scratch, ThreadPool* team, EliminationResult& result)
      : front_(front),
        m_(front.matrix),
        options_(options),
        scratch_(scratch),
        team_(team),
        result_(result),
        next_(from),
        batch_begin_(from) {}

  Index run() {
    for (bool progress = true; progress && next_ < front_.candidates;) {
      progress = false;
      for (Index j = next_; j < front_.candidates;) {
        const int taken = try_column(j);
        if (result_.not_finite) return next_;
        progress = progress || taken > 0;
        j = taken > 0 ? std::max(j, next_) : j + 1;
        if (next_ - batch_begin_ >= kFrontBlock - 1) flush();
      }
    }
    flush();
    result_.additions += searches_;
    return next_;
  }

 private:
  Scalar entry(Index i, Index j) const { return i >= j ? m_.at(i, j) : m_.at(j, i); }
  Index order() const { return m_.layout.order; }
  Index leading_scaled() const { return m_.layout.padded; }
  Scalar& scaled(Index row, Index pivot) {
    return scratch_.scaled[Offset{pivot - batch_begin_} * leading_scaled() + (row - batch_begin_)];
  }

  ColumnMaxima maxima(Index j, Index skip) const {
    ColumnMaxima found;
    for (Index i = next_; i < order(); ++i) {
      if (i == j || i == skip) continue;
      const double value = std::fabs(entry(i, j));
      if (!std::isfinite(value)) found.finite = false;
      if (i < front_.candidates && value > found.candidate) {
        found.candidate = value;
        found.candidate_row = i;
      }
      found.largest = std::max(found.largest, value);
    }
    return found;
  }

  /// Tries column j alone, then with its strongest candidate partner. Returns the pivots taken (0, 1 or 2).
  int try_column(Index j) {
    const double limit = 1 / options_.threshold;
    const ColumnMaxima own = maxima(j, -1);
    const double diagonal = m_.at(j, j);
    if (!own.finite || !std::isfinite(diagonal)) {
      result_.not_finite = true;
      return 0;
    }
    if (own.largest == 0 && diagonal == 0) {
      take_zero(j);
      return 1;
    }
    if (std::fabs(diagonal) >= Rounding<Scalar>::kLeastPivot && own.largest <= limit * std::fabs(diagonal)) {
      take_one(j);
      return 1;
    }
    const Index partner = own.candidate_row;
    if (partner < 0) return 0;
    const double a = diagonal, b = entry(partner, j), c = m_.at(partner, partner);
    if (std::fabs(b) < Rounding<Scalar>::kLeastPivot ||
        std::max(std::fabs(a), std::fabs(c)) > kTwoByTwoShare * std::fabs(b))
      return 0;
    const double first = maxima(j, partner).largest, second = maxima(partner, j).largest;
    const double determinant = std::fabs(b) * std::fabs(b * (1 - (a / b) * (c / b)));
    const double growth =
        std::max(std::fabs(c) * first + std::fabs(b) * second, std::fabs(b) * first + std::fabs(a) * second);
    if (!(growth <= limit * determinant)) return 0;
    take_two(j, partner);
    return 2;
  }

  void move_to_front(Index j, Index place) {
    if (j == place) return;
    swap_symmetric(front_, place, j, options_.keep_factor ? 0 : batch_begin_);
    for (Index pivot = batch_begin_; pivot < next_; ++pivot)
      std::swap(scaled(place, pivot), scaled(j, pivot));
  }

  void take_zero(Index j) {
    move_to_front(j, next_);
    front_.pivots.diagonal[next_] = 0;
    front_.pivots.off_diagonal[next_] = 0;
    front_.pivots.kind[next_] = PivotKind::kZero;
    m_.at(next_, next_) = 1;
    for (Index i = next_ + 1; i < order(); ++i) scaled(i, next_) = 0;
    front_.growth[next_] += 0;
    ++next_;
  }

  void take_one(Index j) {
    move_to_front(j, next_);
    const Index k = next_;
    Scalar* column = m_.column(k, k) - k;
    const Scalar pivot = column[k], inverse = 1 / pivot;
    front_.pivots.diagonal[k] = pivot;
    front_.pivots.off_diagonal[k] = 0;
    front_.pivots.kind[k] = PivotKind::kOne;
    Scalar size = 1, signed_sum = front_.fault.sign[k];
    for (Index i = k + 1; i < order(); ++i) {
      scaled(i, k) = column[i];
      column[i] *= inverse;
      size += std::fabs(column[i]);
      signed_sum += column[i] * front_.fault.sign[i];
    }
    column[k] = 1;
    const Scalar weight = std::fabs(pivot) * size, step = pivot * signed_sum;
    add_growth_and_image(column, k, weight, step);
    note_image(order() - k);
    ++next_;
    update_candidates(k, 1);
  }

  void take_two(Index j, Index partner) {
    const Index k = next_;
    move_to_front(j, k);
    move_to_front(partner == k ? j : partner, k + 1);
    const Scalar a = m_.at(k, k), b = m_.at(k + 1, k), c = m_.at(k + 1, k + 1);
    front_.pivots.diagonal[k] = a;
    front_.pivots.diagonal[k + 1] = c;
    front_.pivots.off_diagonal[k] = b;
    front_.pivots.off_diagonal[k + 1] = 0;
    front_.pivots.kind[k] = PivotKind::kTwoFirst;
    front_.pivots.kind[k + 1] = PivotKind::kTwoSecond;
    Scalar* first = m_.column(k, k) - k;
    Scalar* second = m_.column(k + 1, k + 1) - (k + 1);
    const Index below = k + 2;
    for (Index i = below; i < order(); ++i) {
      scaled(i, k) = first[i];
      scaled(i, k + 1) = second[i];
    }
    Scalar sums[2] = {1, 1}, z[2] = {front_.fault.sign[k], front_.fault.sign[k + 1]};
    // Backward stable since |a|, |c| <= kTwoByTwoShare |b| (src/inertia/error_bound.md, section 2).
    const Scalar a_over_b = a / b, c_over_b = c / b, inverse = 1 / (b * (a_over_b * c_over_b - 1));
    for (Index i = below; i < order(); ++i) {
      const Scalar f = first[i], g = second[i];
      first[i] = (c_over_b * f - g) * inverse;
      second[i] = (a_over_b * g - f) * inverse;
      sums[0] += std::fabs(first[i]);
      sums[1] += std::fabs(second[i]);
      z[0] += first[i] * front_.fault.sign[i];
      z[1] += second[i] * front_.fault.sign[i];
    }
    first[k] = second[k + 1] = 1;
    first[k + 1] = 0;
    const Scalar weight[2] = {std::fabs(a) * sums[0] + std::fabs(b) * sums[1],
                              std::fabs(b) * sums[0] + std::fabs(c) * sums[1]};
    const Scalar step[2] = {a * z[0] + b * z[1], b * z[0] + c * z[1]};
    const Scalar* column[2] = {first, second};
    for (Index p = 0; p < 2; ++p) {
      add_growth_and_image(column[p], k + p, weight[p], step[p]);
      note_image(order() - k);
    }
    next_ += 2;
    ++result_.two_by_two;
    update_candidates(k, 2);
  }

  /// growth_i += |l_i| weight, image_i += l_i step, from row `pivot` on; `column` is indexed by rows.
  void add_growth_and_image(const Scalar* column, Index pivot, Scalar weight, Scalar step) {
    for (Index i = pivot; i < order(); ++i) {
      front_.growth[i] += std::fabs(column[i]) * weight;
      front_.fault.image[i] += column[i] * step;
    }
  }

  /// One more pivot in the image, whose entry of L^T x took `depth` additions.
  void note_image(Index depth) {
    result_.sign_sum_depth = std::max(result_.sign_sum_depth, depth);
    ++result_.image_additions;
  }

  /// Takes `count` new pivots out of the candidate columns only; the rest follows in one product (flush).
  void update_candidates(Index pivot, Index count) {
    ++searches_;
    for (Index p = pivot; p < pivot + count; ++p) {
      const Scalar* lower = m_.column(p, p) - p;
      for (Index j = next_; j < front_.candidates; ++j) {
        Scalar* column = m_.column(j, j) - j;
        const Scalar w = scaled(j, p);
        if (w == 0) continue;
        for (Index i = j; i < order(); ++i) column[i] -= lower[i] * w;
      }
    }
    searches_ += count - 1;
  }

  /// Takes the pivots since the last flush out of the rows below the candidates.
  void flush() {
    const Index count = next_ - batch_begin_, rest = front_.candidates;
    if (count > 0 && rest < order()) {
      // Pivots may straddle a column block of the front: one product per block.
      for (Index begin = batch_begin_; begin < next_;) {
        const Index block = m_.layout.block_of(begin);
        const Index end = std::min(next_, m_.layout.block_end(block));
        pack_columns(m_.column(rest, begin), m_.layout.leading_dimension(block), &scaled(rest, begin),
                     leading_scaled(), rest, order(), end - begin, scratch_.beyond);
        update_trailing(m_, scratch_.beyond, end - begin, rest, team_);
        result_.longest_sum = std::max(result_.longest_sum, end - begin);
        ++searches_;
        begin = end;
      }
    }
    batch_begin_ = next_;
  }

  const FrontOf<Scalar>& front_;
  const BlockLowerOf<Scalar>& m_;
  const EliminationOptions& options_;
  EliminationScratchOf<Scalar>& scratch_;
  ThreadPool* team_;
  EliminationResult& result_;
  Index next_, batch_begin_;
  Index searches_ = 0;
};

}  // namespace

template <class Scalar>
Index eliminate_by_search(const FrontOf<Scalar>& front, Index from, const EliminationOptions& options,
                          EliminationScratchOf<Scalar>& scratch, ThreadPool* team,
                          EliminationResult& result) {
  const Offset needed = Offset{front.matrix.layout.padded} * kFrontBlock;
  if (scratch.scaled.size() < needed) scratch.scaled = Buffer<Scalar>(needed);
  return SearchEliminator<Scalar>(front, from, options, scratch, team, result).run();
}

template Index eliminate_by_search(const FrontOf<double>&, Index, const EliminationOptions&,
                                   EliminationScratchOf<double>&, ThreadPool*, EliminationResult&);
template Index eliminate_by_search(const FrontOf<float>&, Index, const EliminationOptions&,
                                   EliminationScratchOf<float>&, ThreadPool*, EliminationResult&);

}  // namespace stanchion
