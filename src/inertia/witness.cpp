#include "inertia/witness.hpp"

#include <algorithm>
#include <cmath>

#include "numeric/block_solve.hpp"
#include "numeric/extended_product.hpp"

namespace stanchion {
namespace {

constexpr Index kV = kBlockVectors;
constexpr double kUnit = 0x1p-53;

/// The negative eigenvalue of one pivot and its eigenvector on one or two positions.
struct Candidate {
  double value;
  Index position[2];
  double entry[2];
};

std::vector<Candidate> most_negative_pivots(const Factor& factor) {
  std::vector<Candidate> found;
  for (const FactorFront& front : factor.fronts) {
    for (Index k = 0; k < front.pivots; ++k) {
      const double a = front.diagonal[k];
      if (front.kind[k] != PivotKind::kTwoFirst) {
        if (a < 0) found.push_back({a, {front.position[k], -1}, {1, 0}});
        continue;
      }
      const double b = front.off_diagonal[k], c = front.diagonal[k + 1];
      const double least = (a + c) / 2 - std::hypot((a - c) / 2, b);
      // (A - least I) v = 0: v = (b, least - a), scaled.
      const double size = std::max(std::fabs(b), std::fabs(least - a));
      found.push_back({least, {front.position[k], front.position[k + 1]}, {b / size, (least - a) / size}});
      ++k;
    }
  }
  const auto keep = std::min<std::size_t>(found.size(), static_cast<std::size_t>(kV));
  std::partial_sort(found.begin(), found.begin() + static_cast<std::ptrdiff_t>(keep), found.end(),
                    [](const Candidate& x, const Candidate& y) { return x.value < y.value; });
  found.resize(keep);
  return found;
}

/// Sum of x_i b_i with its error bound (Ogita, Rump, Oishi, SIAM J. Sci. Comput. 26 (2005), Dot2).
struct DotResult {
  double value = 0, error = 0;
};

DotResult dot(const std::vector<double>& x, const std::vector<double>& b, std::size_t vector) {
  double sum = 0, tail = 0, size = 0;
  const std::size_t rows = x.size() / static_cast<std::size_t>(kV);
  for (std::size_t i = 0; i < rows; ++i) {
    const double p = x[i * kV + vector], q = b[i * kV + vector];
    const double product = p * q, product_tail = std::fma(p, q, -product);
    const double next = sum + product, t = next - sum;
    tail += ((sum - (next - t)) + (product - t)) + product_tail;
    sum = next;
    size += std::fabs(product);
  }
  const double n = static_cast<double>(rows) + 2;
  return {sum + tail, kUnit * std::fabs(sum + tail) + 1.1 * n * n * kUnit * kUnit * size};
}

}  // namespace

std::optional<NegativeDirection> find_negative_direction(const Analysis& analysis,
                                                         const ShiftedMatrix& matrix,
                                                         const Factorization& factorization,
                                                         ThreadPool& pool) {
  const Factor& factor = *factorization.factor;
  const auto rows = static_cast<std::size_t>(factor.rows);
  const std::vector<Candidate> candidates = most_negative_pivots(factor);
  if (candidates.empty()) return std::nullopt;
  std::vector<double> x(rows * kV, 0.0), b(rows * kV);
  for (std::size_t v = 0; v < candidates.size(); ++v) {
    for (int s = 0; s < 2; ++s) {
      if (candidates[v].position[s] >= 0) {
        x[static_cast<std::size_t>(candidates[v].position[s]) * kV + v] = candidates[v].entry[s];
      }
    }
  }
  BlockSolver(analysis, factor, pool).backward(x.data());
  extended_times(matrix, x.data(), b.data(), pool);
  const AbsoluteNorm norm = absolute_norm(matrix, pool);
  std::optional<NegativeDirection> best;
  double best_quotient = 0;
  for (std::size_t v = 0; v < candidates.size(); ++v) {
    const DotResult form = dot(x, b, v);
    double x_square = 0, x_times_b = 0;
    for (std::size_t i = 0; i < rows; ++i) {
      x_square += x[i * kV + v] * x[i * kV + v];
      x_times_b += std::fabs(x[i * kV + v] * b[i * kV + v]);
    }
    // b carries u |b| besides (extended_times).
    const double product_error = norm.product_error() * x_square;
    const double error = 1.01 * (form.error + kUnit * x_times_b + product_error) + 0x1p-900;
    if (!(form.value + error < 0)) continue;
    const double quotient = (form.value + error) / x_square;
    if (best && quotient >= best_quotient) continue;
    best_quotient = quotient;
    best.emplace();
    best->quadratic_form = form.value;
    best->error_bound = error;
    best->x.resize(rows);
    // x^T (S A S) x = (S x)^T A (S x), and S x is exact.
    for (std::size_t i = 0; i < rows; ++i)
      best->x[i] = x[i * kV + v] * (*matrix.scale)[static_cast<Offset>(i)];
  }
  return best;
}

}  // namespace stanchion
