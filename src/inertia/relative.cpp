#include "inertia/relative.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <new>
#include <tuple>
#include <vector>

#include "base/clock.hpp"
#include "base/counter_random.hpp"
#include "numeric/block_solve.hpp"
#include "numeric/extended_product.hpp"

namespace stanchion {
namespace {

constexpr Index kV = kBlockVectors;
constexpr double kUnit = 0x1p-53;

using Norms = std::array<double, kV>;

/// The square root T of one pivot and the signs J, D ~ T J T^T. For a 2x2 pivot T^-1 = diag(1/sqrt|lambda|) Q^T is the
/// matrix that is stored and used; T is its exact inverse.
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

/// Visits every pivot with its rows (positions) in elimination order.
template <class Visit>
void each_pivot(const Factor& factor, const Visit& visit) {
  for (const FactorFront& front : factor.fronts) {
    for (Index k = 0; k < front.pivots; ++k) {
      const PivotRoot root = root_of(front, k);
      visit(root, front.position[k], root.pair ? front.position[k + 1] : Index{-1});
      if (root.pair) ++k;
    }
  }
}

Norms column_norms(const std::vector<double>& block) {
  Norms sums{};
  for (std::size_t i = 0; i < block.size(); i += kV) {
    for (std::size_t v = 0; v < kV; ++v) sums[v] += block[i + v] * block[i + v];
  }
  for (double& s : sums) s = std::sqrt(s) * 1.000001;
  return sums;
}

class RelativeTest {
 public:
  RelativeTest(const Analysis& analysis, const ShiftedMatrix& matrix, const Factorization& factorization,
               ThreadPool& pool)
      : matrix_(matrix), factorization_(factorization), factor_(*factorization.factor), pool_(pool),
        solver_(analysis, factor_, pool), rows_(static_cast<std::size_t>(factor_.rows)) {}

  RelativeResult run(double failure, std::uint64_t key) {
    RelativeResult result;
    result.failure_probability = failure;
    result.relative_bound = INFINITY;
    count_signs(result);
    if (zero_pivot_) return result;
    const double g = small_ball(failure / 2, kV);  // two events: the norm of M^-1 and the norm of F
    draw(key);
    std::vector<double> y = transposed_solve();
    const Norms y_norm = column_norms(y);
    std::vector<double> z(y.size());
    extended_times(matrix_, y.data(), z.data(), pool_);
    const Norms b_norm = column_norms(z);
    solve(z);
    const Norms z_norm = column_norms(z);
    combine(z);
    const Norms v_norm = column_norms(z);
    judge(result, g, y_norm, b_norm, z_norm, v_norm);
    return result;
  }

 private:
  void count_signs(RelativeResult& result) {
    for (const FactorFront& front : factor_.fronts) {
      for (Index k = 0; k < front.pivots; ++k) {
        zero_pivot_ = zero_pivot_ || front.kind[k] == PivotKind::kZero;
        if (front.kind[k] == PivotKind::kTwoFirst) pair_spread_ = std::max(pair_spread_, column_ratio(front, k));
      }
    }
    if (zero_pivot_) return;
    each_pivot(factor_, [&](const PivotRoot& root, Index, Index second) {
      for (int s = 0; s < (second < 0 ? 1 : 2); ++s) ++(root.sign[s] < 0 ? result.negative : result.positive);
    });
  }

  /// Larger over smaller of the absolute sums of columns k and k + 1 of L.
  static double column_ratio(const FactorFront& front, Index k) {
    double sums[2] = {0, 0};
    for (int c = 0; c < 2; ++c) {
      const double* column = front.lower.data() + Offset{k + c} * front.order;
      for (Index i = k; i < front.order; ++i) sums[c] += std::fabs(column[i]);
    }
    return std::max(sums[0] / sums[1], sums[1] / sums[0]);
  }

  /// Bound on || |M| ||_2^2 <= || |L||T||T|^T|L|^T ||_inf. The row bounds of the factorization hold at least 42 u times
  /// the row sums of |L||D||L^T|; for 1x1 pivots |T||T|^T = |D|, for 2x2 it is at most 1.7 |b| in every entry.
  double root_growth() const {
    const double growth = factorization_.error_bound / (42 * kUnit);
    return pair_spread_ > 0 ? 1.7 * (1 + pair_spread_) * growth : growth;
  }

  void draw(std::uint64_t key) {
    const CounterRandom random(key);
    gaussian_.resize(rows_ * kV);
    constexpr std::size_t kChunk = 8192;
    pool_.run(static_cast<Offset>((gaussian_.size() + kChunk - 1) / kChunk), [&](Offset piece, int) {
      const std::size_t begin = static_cast<std::size_t>(piece) * kChunk;
      for (std::size_t k = begin; k < std::min(begin + kChunk, gaussian_.size()); k += 2) {
        std::tie(gaussian_[k], gaussian_[k + 1]) = random.gaussians(k / 2);
      }
    });
  }

  double* row(std::vector<double>& block, Index position) { return block.data() + Offset{position} * kV; }

  /// y = M^-T w: T^-T, then L^-T.
  std::vector<double> transposed_solve() {
    std::vector<double> y = gaussian_;
    each_pivot(factor_, [&](const PivotRoot& root, Index first, Index second) {
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
    return y;
  }

  /// z = M^-1 b in place: L^-1, then T^-1.
  void solve(std::vector<double>& z) {
    solver_.forward(z.data());
    each_pivot(factor_, [&](const PivotRoot& root, Index first, Index second) {
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

  /// v = z - J w.
  void combine(std::vector<double>& z) {
    each_pivot(factor_, [&](const PivotRoot& root, Index first, Index second) {
      for (Index v = 0; v < kV; ++v) row(z, first)[v] -= root.sign[0] * row(gaussian_, first)[v];
      if (second < 0) return;
      for (Index v = 0; v < kV; ++v) row(z, second)[v] -= root.sign[1] * row(gaussian_, second)[v];
    });
  }

  void judge(RelativeResult& result, double g, const Norms& y, const Norms& b, const Norms& z, const Norms& v) {
    const double gamma = 1.01 * kUnit * (solver_.longest_path() + 16);
    const double m_norm = std::sqrt(root_growth());  // || |M| ||_2
    const AbsoluteNorm data = absolute_norm(matrix_);
    // Every term of a row of A_s y: its coefficient, product, addition; then the joining of the ranges.
    const double product_error = 8 * static_cast<double>(data.longest_row + 8) * kUnit * kUnit * data.norm;
    double h_most = 0, y_most = 0;
    for (std::size_t i = 0; i < kV; ++i) {
      h_most = std::max(h_most, gamma * m_norm * y[i]);
      y_most = std::max(y_most, y[i]);
    }
    if (!(h_most < g)) return;
    const double beta = y_most / (g - h_most);
    double bound = 0;
    for (std::size_t i = 0; i < kV; ++i) {
      const double h = gamma * m_norm * y[i];
      const double rho = 1.01 * kUnit * b[i] + product_error * y[i] + gamma * m_norm * z[i] + 0x1p-500;
      const double measured = v[i] + 1.01 * kUnit * (z[i] + v[i]);
      const double total = (measured + h + beta * rho) / (g - h);
      if (!(total <= bound)) {
        bound = total;
        result.measured_part = measured / (g - h);
        result.transposed_part = h / (g - h);
        result.residual_part = beta * rho / (g - h);
      }
    }
    result.relative_bound = std::isnan(bound) ? INFINITY : bound * 1.001;
    result.certified = result.relative_bound < 1;
  }

  const ShiftedMatrix& matrix_;
  const Factorization& factorization_;
  const Factor& factor_;
  ThreadPool& pool_;
  BlockSolver solver_;
  std::size_t rows_;
  std::vector<double> gaussian_;
  bool zero_pivot_ = false;
  double pair_spread_ = 0;  ///< largest column_ratio of a 2x2 pivot; 0 when there is none
};

}  // namespace

Result<RelativeResult> certify_relative(const Analysis& analysis, const ShiftedMatrix& matrix,
                                        const Factorization& factorization, RiskBudget& risk, std::uint64_t seed,
                                        ThreadPool& pool) {
  const Stopwatch watch;
  const double failure = risk.charge();
  const std::uint64_t key = CounterRandom::combine(seed, static_cast<std::uint64_t>(risk.attempts()));
  try {
    RelativeResult result = RelativeTest(analysis, matrix, factorization, pool).run(failure, key);
    result.seconds = watch.seconds();
    return result;
  } catch (const std::bad_alloc&) {
    return Status::resource_limit("out-of-memory", "no memory for the vectors of the relative test", "",
                                  "free memory, or ask for the two-offset method");
  }
}

}  // namespace stanchion
