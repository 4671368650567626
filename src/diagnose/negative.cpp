#include "diagnose/negative.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

#include "base/counter_random.hpp"

namespace stanchion {
namespace {

constexpr int kMostRounds = 12;
constexpr int kMostConstrainedRounds =
    60;                            ///< the inverse serves less well where pivots belong to constraints
constexpr double kSettled = 1e-3;  ///< residual over |value|: shapes and signs, not digits, are asked
constexpr Index kGuards = 4;

class Iteration {
 public:
  Iteration(const NegativeSearch& search, ThreadPool& pool)
      : search_(search), s_(search.structure), space_(search.constraints), pool_(pool) {
    all_.resize(static_cast<std::size_t>(s_.rows));
    std::iota(all_.begin(), all_.end(), 0);
  }

  NegativePairs run(Index negative, Index most) {
    const Index wanted = std::min(negative, most);
    const Index width = whole_blocks(wanted + kGuards);
    active_ = wanted + kGuards;
    Columns start = first_vectors(width);
    keep_out(start);
    Index used = orthonormalise(start, all_);
    Columns product = applied(start);
    Ritz ritz = project(start, product, all_, used, false);
    x_ = leading(start, width, used);
    ax_ = leading(product, width, used);
    used_ = std::min(used, width);
    p_ = Columns(s_.rows, width);
    int round = 0;
    for (; round < (space_ == nullptr ? kMostRounds : kMostConstrainedRounds); ++round) {
      ritz_ = Ritz{{ritz.value.begin(), ritz.value.begin() + used_},
                   {ritz.residual.begin(), ritz.residual.begin() + used_}};
      if (settled(wanted)) break;
      ritz = step();
    }
    return finish(wanted, round);
  }

 private:
  /// The matrix, or what it is on the motions that the constraints leave: P A P.
  Columns applied(const Columns& x, Index from = 0) const {
    Columns y = times(search_.matrix, x, pool_, from);
    if (space_ != nullptr) space_->project(y);
    return y;
  }

  /// The vectors of the lowest pivots; beside constraints, whose own pivots are negative, random ones, too.
  Columns first_vectors(Index width) const {
    Index filled = 0;
    Columns start = search_.factor.lowest_pivot_vectors(2 * width, &filled);
    if (space_ == nullptr) return start;
    Columns mixed(s_.rows, 2 * width), random(s_.rows, width);
    const CounterRandom source(search_.seed, 0x6e65676174697665ULL);
    for (std::size_t k = 0; k + 1 < random.values.size(); k += 2) {
      const auto [a, b] = source.gaussians(k / 2);
      random.values[k] = a;
      random.values[k + 1] = b;
    }
    space_->project(random);
    search_.factor.solve(random);
    for (Index i = 0; i < s_.rows; ++i) {
      std::copy_n(random.row(i), width, mixed.row(i));
      std::copy_n(start.row(i), std::min(width, start.count), mixed.row(i) + width);
    }
    space_->project(mixed);
    return mixed;
  }

  /// Towards eigenvectors close to zero. Among constraints (A^-1 r) beside the multipliers is the inverse on
  /// the motions they leave, of either sign; Rayleigh and Ritz choose the lowest.
  void precondition(Columns& w) const {
    if (space_ == nullptr) return search_.factor.solve_absolute(w);
    search_.factor.solve(w);
    space_->project(w);
  }

  static Columns leading(const Columns& from, Index width, Index used) {
    Columns to(from.rows, width);
    for (Index i = 0; i < from.rows; ++i) {
      for (Index c = 0; c < std::min(width, std::min(used, from.count)); ++c) to.row(i)[c] = from.row(i)[c];
    }
    return to;
  }

  bool settled(Index wanted) const {
    if (used_ < wanted) return false;
    for (Index k = 0; k < wanted; ++k) {
      const auto at = static_cast<std::size_t>(k);
      if (!(ritz_.value[at] < 0) || ritz_.residual[at] > kSettled * std::fabs(ritz_.value[at])) return false;
    }
    return true;
  }

  /// Takes the parts along node motions and zero directions away.
  void keep_out(Columns& x) const {
    remove(search_.motions, s_, x);
    const NearZero& zero = search_.zero;
    for (const PartPairs& pairs : zero.parts) {
      for (Index k = 0; k < pairs.used; ++k) {
        if (std::fabs(pairs.ritz.value[static_cast<std::size_t>(k)]) > search_.zero_limit) continue;
        std::vector<double> along(static_cast<std::size_t>(x.count), 0.0);
        for (const Index i : s_.part(pairs.part)) {
          const double z = zero.x.row(i)[k];
          for (Index c = 0; c < x.count; ++c) along[static_cast<std::size_t>(c)] += z * x.row(i)[c];
        }
        for (const Index i : s_.part(pairs.part)) {
          const double z = zero.x.row(i)[k];
          for (Index c = 0; c < x.count; ++c) x.row(i)[c] -= z * along[static_cast<std::size_t>(c)];
        }
      }
    }
    if (space_ != nullptr) space_->project(x);
  }

  /// One Rayleigh-Ritz step on the span of x, the residuals, preconditioned and plain, and the last
  /// directions.
  Ritz step() {
    const Index width = x_.count, active = std::min(used_, active_);
    Columns span = span_of(width, active);
    const Columns before = std::move(x_);
    const Index used = orthonormalise(span, all_);
    // x comes first and is orthonormal already: where nothing of it was dropped its product is known.
    const Index known = used_ == width ? width : 0;
    Columns product = applied(span, known);
    for (Index i = 0; i < s_.rows; ++i) std::copy_n(ax_.row(i), known, product.row(i));
    Ritz ritz = project(span, product, all_, used, false, width);
    x_ = leading(span, width, used);
    ax_ = leading(product, width, used);
    used_ = std::min(used, width);
    keep_directions(before, width, active);
    return ritz;
  }

  Columns span_of(Index width, Index active) const {
    Columns w(s_.rows, width);
    for (Index i = 0; i < s_.rows; ++i) {
      for (Index c = 0; c < active; ++c) {
        w.row(i)[c] = ax_.row(i)[c] - ritz_.value[static_cast<std::size_t>(c)] * x_.row(i)[c];
      }
    }
    // The residual itself serves eigenvalues far below zero, the preconditioned one those close to it.
    Columns plain = w;
    keep_out(plain);
    precondition(w);
    keep_out(w);
    Columns span(s_.rows, whole_blocks(width + 3 * active));
    for (Index i = 0; i < s_.rows; ++i) {
      double* to = span.row(i);
      std::copy_n(x_.row(i), width, to);
      std::copy_n(w.row(i), active, to + width);
      std::copy_n(plain.row(i), active, to + width + active);
      std::copy_n(p_.row(i), active, to + width + 2 * active);
    }
    return span;
  }

  /// The next directions: the new vectors less their parts along the old ones.
  void keep_directions(const Columns& before, Index width, Index active) {
    p_ = Columns(s_.rows, width);
    std::vector<double> overlap(static_cast<std::size_t>(width) * static_cast<std::size_t>(active), 0.0);
    const auto entry = [&](Index a, Index b) -> double& {
      return overlap[static_cast<std::size_t>(a * active + b)];
    };
    for (Index i = 0; i < s_.rows; ++i) {
      for (Index a = 0; a < width; ++a) {
        for (Index b = 0; b < active; ++b) entry(a, b) += before.row(i)[a] * x_.row(i)[b];
      }
    }
    for (Index i = 0; i < s_.rows; ++i) {
      double* to = p_.row(i);
      std::copy_n(x_.row(i), active, to);
      for (Index a = 0; a < width; ++a) {
        for (Index b = 0; b < active; ++b) to[b] -= before.row(i)[a] * entry(a, b);
      }
    }
  }

  NegativePairs finish(Index wanted, int round) {
    NegativePairs found;
    found.rounds = round;
    found.x = x_;
    Columns product = times_extended(search_.matrix, found.x, pool_);
    if (space_ != nullptr) space_->project(product);
    Ritz ritz = project(found.x, product, all_, used_, false);
    for (std::size_t k = 0; k < ritz.value.size() && k < static_cast<std::size_t>(wanted); ++k) {
      // An eigenvalue lies within the residual of the value (Parlett, ch. 4): only then is the sign known.
      if (!(ritz.value[k] + ritz.residual[k] < 0)) break;
      found.ritz.value.push_back(ritz.value[k]);
      found.ritz.residual.push_back(ritz.residual[k]);
    }
    return found;
  }

  const NegativeSearch& search_;
  const Structure& s_;
  const ConstraintSpace* space_;
  ThreadPool& pool_;
  std::vector<Index> all_;
  Columns x_, ax_, p_;
  Ritz ritz_;
  Index used_ = 0;
  Index active_ = 0;  ///< pairs that are improved; the blocks' other columns are along for the ride
};

}  // namespace

Index negative_columns(Index wanted) {
  const Index active = wanted + kGuards, width = whole_blocks(active);
  // The pairs, their products, the last directions, the pairs before; the span with a copy or with its
  // product.
  return 4 * width + 2 * whole_blocks(width + 3 * active);
}

NegativePairs find_negative(const NegativeSearch& search, Index negative, Index most, ThreadPool& pool) {
  if (negative == 0 || most == 0) return {};
  return Iteration(search, pool).run(negative, most);
}

}  // namespace stanchion
