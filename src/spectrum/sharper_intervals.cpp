#include <algorithm>
#include <cmath>
#include <numeric>

#include "spectrum/residual_intervals.hpp"

namespace stanchion {
namespace {

constexpr double kUnit = 0x1p-53;

/// What the span of a group is: its Rayleigh quotients lie between `low` and `high`, and `residual` bounds
/// C^ Q - Q H.
struct Quotients {
  double low = 0, high = 0, residual = 0;
};

/// S = X^T R of the group, normalised, symmetrised: entry (p, q), and a bound on its error.
struct Work {
  double value = 0, error = 0;
};

Work work_of(const DefiniteBase& base, const ResidualPair& left, const ResidualPair& right) {
  const double scale = 1 / (left.norm * right.norm);
  const double product = std::inner_product(left.coordinates.begin(), left.coordinates.end(),
                                            right.residual_coordinates.begin(), 0.0);
  const double rounding = 1.01 * (static_cast<double>(base.rows()) + 8) * kUnit;
  const double error = left.norm * (right.floor + rounding * right.residual) +
                       base.solve_error() * left.length * (right.residual + right.floor);
  return {product * scale, 1.001 * (error * scale + 4 * kUnit * std::fabs(product * scale))};
}

Quotients quotients_of(const DefiniteBase& base, const std::vector<ResidualPair>& pairs,
                       const std::vector<std::size_t>& members) {
  const double epsilon = gram_defect(base, pairs, members);
  if (!(epsilon < 0.9)) return {-INFINITY, INFINITY, INFINITY};
  double residual = 0, least = INFINITY, most = -INFINITY, beside = 0, error = 0;
  for (const std::size_t p : members) {
    const double scaled = pairs[p].residual / pairs[p].norm;
    residual += scaled * scaled;
    for (const std::size_t q : members) {
      const Work one = work_of(base, pairs[p], pairs[q]);
      const Work other = p == q ? one : work_of(base, pairs[q], pairs[p]);
      const double entry = (one.value + other.value) / 2, off = (one.error + other.error) / 2;
      error += off * off;
      if (p != q) {
        beside += entry * entry;
        continue;
      }
      least = std::min(least, pairs[p].theta + entry);
      most = std::max(most, pairs[p].theta + entry);
    }
  }
  const double middle = least + (most - least) / 2;
  double spread = 0;
  for (const std::size_t p : members) spread = std::max(spread, std::fabs(pairs[p].theta - middle));
  const double half = std::max(most - middle, middle - least);
  const double reach =
      1.001 * (half + std::sqrt(beside) + std::sqrt(error) + epsilon * spread) / (1 - epsilon) +
      8 * kUnit * std::fabs(middle);
  return {middle - reach, middle + reach, 1.001 * std::sqrt(residual / (1 - epsilon))};
}

/// How far beyond the quotients the eigenvalues may lie on one side, when the nearest ones beyond the other
/// side are `gap` away.
double overshoot(double residual, double gap) {
  if (std::isinf(gap)) return 0;
  return 1.001 * residual * residual / (gap * (1 - 1e-9));
}

}  // namespace

void sharpen(const DefiniteBase& base, const std::vector<ResidualPair>& pairs, double below, double above,
             std::vector<EigenvalueGroup>& groups) {
  std::vector<EigenvalueGroup> sharper = groups;
  for (std::size_t g = 0; g < groups.size(); ++g) {
    const double from = g > 0 ? groups[g - 1].high : below;
    const double to = g + 1 < groups.size() ? groups[g + 1].low : above;
    const Quotients found = quotients_of(base, pairs, groups[g].pairs);
    if (!std::isfinite(found.low) || !std::isfinite(found.high)) continue;
    const auto outwards = [](double value, int direction) {
      return value + direction * 2 * kUnit * std::fabs(value);
    };
    if (found.high < to) {
      const double low = outwards(found.low - overshoot(found.residual, to - found.high), -1);
      if (low > from) sharper[g].low = std::max(groups[g].low, low);
    }
    if (found.low > from) {
      const double high = outwards(found.high + overshoot(found.residual, found.low - from), 1);
      if (high < to) sharper[g].high = std::min(groups[g].high, high);
    }
  }
  groups = std::move(sharper);
}

}  // namespace stanchion
