#include "inertia/relative.hpp"

#include <algorithm>
#include <cmath>
#include <new>
#include <numeric>
#include <span>
#include <tuple>
#include <vector>

#include "base/clock.hpp"
#include "base/counter_random.hpp"
#include "base/ranges.hpp"
#include "numeric/block_columns.hpp"
#include "numeric/block_solve.hpp"
#include "numeric/extended_product.hpp"

namespace stanchion {
namespace {

constexpr Index kV = kBlockVectors;
constexpr double kUnit = 0x1p-53;

constexpr int kMostPowerSteps = 4;

/// The square root T of one pivot and the signs J, D ~ T J T^T. For a 2x2 pivot T^-1 = diag(1/sqrt|lambda|)
/// Q^T is the matrix that is stored and used; T is its exact inverse.
struct PivotRoot {
  bool pair = false;
  double root = 0, inverse = 0;  ///< 1x1
  double r[2][2] = {};           ///< 2x2: T^-1
  double sign[2] = {1, 1};
};

PivotRoot root_of(const FactorFront& front, Index k) {
  PivotRoot result;
  const double a = front.diagonal[k];
  if (front.kind[k] != PivotKind::kTwoFirst) {
    result.root = std::sqrt(std::fabs(a));
    result.inverse = 1 / result.root;
    result.sign[0] = a < 0 ? -1 : 1;
    return result;
  }
  const double b = front.off_diagonal[k], c = front.diagonal[k + 1];
  // Jacobi rotation (Rutishauser): the two eigenvalues have opposite signs since |a c| < b^2.
  const double theta = (c - a) / (2 * b);
  const double t = (theta >= 0 ? 1.0 : -1.0) / (std::fabs(theta) + std::sqrt(theta * theta + 1));
  const double cosine = 1 / std::sqrt(t * t + 1), sine = t * cosine;
  const double first = a - t * b, second = c + t * b;
  const double scale_first = 1 / std::sqrt(std::fabs(first)), scale_second = 1 / std::sqrt(std::fabs(second));
  result.pair = true;
  result.r[0][0] = cosine * scale_first;
  result.r[0][1] = -sine * scale_first;
  result.r[1][0] = sine * scale_second;
  result.r[1][1] = cosine * scale_second;
  result.sign[0] = first < 0 ? -1 : 1;
  result.sign[1] = second < 0 ? -1 : 1;
  return result;
}

/// Visits every pivot of some fronts with its rows (positions) in elimination order.
template <class Visit>
void each_pivot(std::span<const FactorFront> fronts, const Visit& visit) {
  for (const FactorFront& front : fronts) {
    for (Index k = 0; k < front.pivots; ++k) {
      const PivotRoot root = root_of(front, k);
      visit(root, front.position[k], root.pair ? front.position[k + 1] : Index{-1});
      if (root.pair) ++k;
    }
  }
}

/// The larger of two sizes. A NaN counts as infinite: none of the vectors may drop out of a maximum over all
/// of them.
double larger(double most, double size) {
  if (std::isnan(size)) return INFINITY;
  return size > most ? size : most;
}

/// Eight vectors, kV numbers a row.
using Block = Buffer<double>;

constexpr Offset kFrontsAPiece = 256;  ///< for one thread

class RelativeTest {
 public:
  RelativeTest(const Analysis& analysis, const ShiftedMatrix& matrix, const Factorization& factorization,
               const ShiftedMatrix* second, ThreadPool& pool)
      : matrix_(matrix),
        second_(second),
        factorization_(factorization),
        factor_(*factorization.factor),
        pool_(pool),
        solver_(analysis, factor_, pool),
        input_(Offset{factor_.rows} * kV),
        y_(Offset{factor_.rows} * kV),
        v_(Offset{factor_.rows} * kV) {}

  RelativeResult run(double failure, std::uint64_t key) {
    RelativeResult result;
    result.failure_probability = failure;
    result.relative_bound = INFINITY;
    count_signs(result);
    if (zero_pivot_) return result;
    const double events = second_ != nullptr ? 3 : 2;  // the norms of M^-1 and of F, and of M^-1 B M^-T
    const double g = small_ball(failure / events, kV);
    draw(key);
    data_ = absolute_norm(matrix_, pool_);
    gamma_ = 1.01 * kUnit * (solver_.longest_path() + 16);
    m_norm_ = std::sqrt(root_growth());  // || |M| ||_2
    ColumnSums noise{};
    for (int step = 1; step <= kMostPowerSteps; ++step) {
      if (!apply_error(g, noise, step == 1 ? &result : nullptr)) return result;
      judge(result, g, step, norms(v_), noise);
      // More steps pay only while what was measured, not what rounding may hide, is in the way.
      if (result.certified || !(result.transposed_part + result.residual_part < 0.25)) return result;
    }
    return result;
  }

 private:
  void count_signs(RelativeResult& result) {
    for (const FactorFront& front : factor_.fronts) {
      for (Index k = 0; k < front.pivots; ++k) {
        zero_pivot_ = zero_pivot_ || front.kind[k] == PivotKind::kZero;
        if (front.kind[k] == PivotKind::kTwoFirst)
          pair_spread_ = std::max(pair_spread_, column_ratio(front, k));
      }
    }
    if (zero_pivot_) return;
    each_pivot(factor_.fronts, [&](const PivotRoot& root, Index, Index second) {
      for (int s = 0; s < (second < 0 ? 1 : 2); ++s) ++(root.sign[s] < 0 ? result.negative : result.positive);
    });
  }

  /// Larger over smaller of the absolute sums of columns k and k + 1 of L.
  static double column_ratio(const FactorFront& front, Index k) {
    double sums[2] = {0, 0};
    front.with_lower([&](const auto* lower) {
      for (int c = 0; c < 2; ++c) {
        const auto* column = lower + Offset{k + c} * front.order;
        for (Index i = k; i < front.order; ++i) sums[c] += std::fabs(column[i]);
      }
    });
    return std::max(sums[0] / sums[1], sums[1] / sums[0]);
  }

  /// Bound on || |M| ||_2^2 <= || |L||T||T|^T|L|^T ||_inf. The row bounds of the factorization hold at least
  /// 42 u times the row sums of |L||D||L^T|; for 1x1 pivots |T||T|^T = |D|, for 2x2 it is at most 1.7 |b| in
  /// every entry.
  double root_growth() const {
    const double growth = factorization_.error_bound / (42 * factorization_.unit_roundoff);
    return pair_spread_ > 0 ? 1.7 * (1 + pair_spread_) * growth : growth;
  }

  /// v := w, Gaussian.
  void draw(std::uint64_t key) {
    const CounterRandom random(key);
    for_ranges(pool_, v_.size(), kBlockRowsAPiece * kV, [&](Offset begin, Offset end) {
      for (Offset k = begin; k < end; k += 2) {
        std::tie(v_[k], v_[k + 1]) = random.gaussians(static_cast<std::uint64_t>(k / 2));
      }
    });
  }

  /// Visits every pivot, fronts apart in all threads.
  template <class Visit>
  void each_pivot_by_all(const Visit& visit) {
    const std::span<const FactorFront> fronts(factor_.fronts);
    for_ranges(pool_, static_cast<Offset>(fronts.size()), kFrontsAPiece, [&](Offset begin, Offset end) {
      each_pivot(fronts.subspan(static_cast<std::size_t>(begin), static_cast<std::size_t>(end - begin)),
                 visit);
    });
  }

  ColumnSums norms(const Block& block) const {
    return column_norms(block.data(), Offset{factor_.rows}, pool_);
  }

  static double* row(Block& block, Index position) { return block.data() + Offset{position} * kV; }

  /// v := F v. Adds the bounds 2 ||h|| + beta ||rho|| + rounding of v to `noise`. The first call (v = w,
  /// `first` not null) also settles beta, and the exclusion radius where one is asked. False when nothing
  /// follows.
  bool apply_error(double g, ColumnSums& noise, RelativeResult* first) {
    for_ranges(pool_, v_.size(), kBlockRowsAPiece * kV, [&](Offset begin, Offset end) {
      std::copy(v_.data() + begin, v_.data() + end, input_.data() + begin);
      std::copy(v_.data() + begin, v_.data() + end, y_.data() + begin);
    });
    transposed_solve(y_);
    const ColumnSums y_norm = norms(y_);
    extended_times(matrix_, y_.data(), v_.data(), pool_);
    const ColumnSums b_norm = norms(v_);
    solve(v_);
    const ColumnSums z_norm = norms(v_);
    if (first != nullptr) {
      const double y_most = std::accumulate(y_norm.begin(), y_norm.end(), 0.0, larger);
      h_most_ = gamma_ * m_norm_ * y_most;
      if (!(h_most_ < g)) return false;
      beta_ = y_most / (g - h_most_);
      first->inverse_norm = beta_ * (1 + 1e-12);
    }
    subtract_signed(v_, input_);
    const ColumnSums v_norm = norms(v_);
    const double product_error = data_.product_error();
    double transposed = 0, residual = 0;
    for (std::size_t i = 0; i < kV; ++i) {
      const double h = gamma_ * m_norm_ * y_norm[i];
      const double rho =
          1.01 * kUnit * b_norm[i] + product_error * y_norm[i] + gamma_ * m_norm_ * z_norm[i] + 0x1p-500;
      noise[i] += 2 * h + beta_ * rho + 1.01 * kUnit * (z_norm[i] + v_norm[i]);
      transposed = std::max(transposed, h);
      residual = std::max(residual, beta_ * rho);
    }
    if (first != nullptr) {
      first->transposed_part = transposed / g;
      first->residual_part = residual / g;
      if (second_ != nullptr) second_norm_ = bound_second(y_norm, g);
    }
    return true;
  }

  /// b >= ||M^-1 B M^-T||, B the second matrix, from the y at hand: one product and one solve more. The
  /// input's place is free.
  double bound_second(const ColumnSums& y_norm, double g) {
    extended_times(*second_, y_.data(), input_.data(), pool_);
    const ColumnSums b_norm = norms(input_);
    solve(input_);
    const ColumnSums u_norm = norms(input_);
    const AbsoluteNorm size = absolute_norm(*second_, pool_);
    double most = 0;
    for (std::size_t i = 0; i < kV; ++i) {
      const double rho = 1.01 * kUnit * b_norm[i] + gamma_ * m_norm_ * u_norm[i] +
                         size.product_error() * y_norm[i] + 0x1p-500;
      most = larger(most, u_norm[i] + beta_ * rho);
    }
    return most / (g - h_most_) * 1.001;
  }

  /// y := M^-T y: T^-T, then L^-T.
  void transposed_solve(Block& y) {
    each_pivot_by_all([&](const PivotRoot& root, Index first, Index second) {
      double* f = row(y, first);
      if (!root.pair) {
        for (Index v = 0; v < kV; ++v) f[v] *= root.inverse;
        return;
      }
      double* s = row(y, second);
      for (Index v = 0; v < kV; ++v) {
        const double a = f[v], b = s[v];
        f[v] = root.r[0][0] * a + root.r[1][0] * b;
        s[v] = root.r[0][1] * a + root.r[1][1] * b;
      }
    });
    solver_.backward(y.data());
  }

  /// z = M^-1 b in place: L^-1, then T^-1.
  void solve(Block& z) {
    solver_.forward(z.data());
    each_pivot_by_all([&](const PivotRoot& root, Index first, Index second) {
      double* f = row(z, first);
      if (!root.pair) {
        for (Index v = 0; v < kV; ++v) f[v] *= root.inverse;
        return;
      }
      double* s = row(z, second);
      for (Index v = 0; v < kV; ++v) {
        const double a = f[v], b = s[v];
        f[v] = root.r[0][0] * a + root.r[0][1] * b;
        s[v] = root.r[1][0] * a + root.r[1][1] * b;
      }
    });
  }

  /// z := z - J w.
  void subtract_signed(Block& z, const Block& w) {
    const auto subtract = [&](Index position, double sign) {
      double* to = row(z, position);
      const double* from = w.data() + Offset{position} * kV;
      for (Index v = 0; v < kV; ++v) to[v] -= sign * from[v];
    };
    each_pivot_by_all([&](const PivotRoot& root, Index first, Index second) {
      subtract(first, root.sign[0]);
      if (second >= 0) subtract(second, root.sign[1]);
    });
  }

  /// After `steps` applications ||v|| + noise >= g ||F||^steps for some vector, as long as ||F|| <= 1; and if
  /// ||F|| were 1 or more, it would be at least g.
  void judge(RelativeResult& result, double g, int steps, const ColumnSums& v, const ColumnSums& noise) {
    double most = 0;
    for (std::size_t i = 0; i < kV; ++i) most = larger(most, (v[i] + noise[i]) / g);
    result.measured_part = *std::max_element(v.begin(), v.end()) / g;
    result.power_steps = steps;
    most *= 1.001;
    result.certified = most < 1;
    result.relative_bound = result.certified ? std::pow(most, 1.0 / steps) * (1 + 1e-12) : most;
    if (result.certified && second_norm_ > 0)
      result.exclusion_radius = (1 - result.relative_bound) / second_norm_ * 0.999;
  }

  const ShiftedMatrix& matrix_;
  const ShiftedMatrix* second_;
  const Factorization& factorization_;
  const Factor& factor_;
  ThreadPool& pool_;
  BlockSolver solver_;
  Block input_, y_, v_;
  bool zero_pivot_ = false;
  AbsoluteNorm data_;
  double gamma_ = 0, m_norm_ = 0, beta_ = 0, h_most_ = 0, second_norm_ = 0;
  double pair_spread_ = 0;  ///< largest column_ratio of a 2x2 pivot; 0 when there is none
};

}  // namespace

Result<RelativeResult> certify_relative(const Analysis& analysis, const ShiftedMatrix& matrix,
                                        const Factorization& factorization, RiskBudget& risk,
                                        std::uint64_t seed, ThreadPool& pool, const ShiftedMatrix* second) {
  const Stopwatch watch;
  const double failure = risk.charge();
  const std::uint64_t key = CounterRandom::combine(seed, static_cast<std::uint64_t>(risk.attempts()));
  try {
    RelativeResult result = RelativeTest(analysis, matrix, factorization, second, pool).run(failure, key);
    result.seconds = watch.seconds();
    return result;
  } catch (const std::bad_alloc&) {
    return Status::resource_limit("out-of-memory", "no memory for the vectors of the relative test", "",
                                  "free memory, or ask for the two-offset method");
  }
}

}  // namespace stanchion
