#include "spectrum/residual_intervals.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

#include "base/ranges.hpp"
#include "dense/symmetric_eigen.hpp"
#include "numeric/block_columns.hpp"
#include "numeric/extended_product.hpp"

namespace stanchion {
namespace {

constexpr auto kV = static_cast<std::size_t>(kBlockVectors);
constexpr double kUnit = 0x1p-53;

using Block = LongVector<double>;

ColumnSums dots(ThreadPool& pool, const Block& a, const Block& b) {
  return column_dots(a.data(), b.data(), static_cast<Offset>(a.size() / kV), pool);
}

template <class Vectors>
ColumnSums norms(ThreadPool& pool, const Vectors& block) {
  return column_norms(block.data(), static_cast<Offset>(block.size() / kV), pool);
}

template <class Vectors>
std::vector<double> column_of(const Vectors& block, std::size_t v) {
  std::vector<double> column(block.size() / kV);
  for (std::size_t i = 0; i < column.size(); ++i) column[i] = block[i * kV + v];
  return column;
}

/// theta +- radius of one group, as residual_bound.md has it; an infinite radius when nothing follows.
struct Interval {
  double low = 0, high = 0;
};

Interval interval_of(const DefiniteBase& base, const std::vector<ResidualPair>& pairs,
                     const std::vector<std::size_t>& members) {
  if (members.size() == 1) {
    const ResidualPair& pair = pairs[members.front()];
    return {pair.theta - pair.radius, pair.theta + pair.radius};
  }
  double least = INFINITY, most = -INFINITY, residual = 0;
  for (const std::size_t p : members) {
    least = std::min(least, pairs[p].theta);
    most = std::max(most, pairs[p].theta);
    const double scaled = pairs[p].residual / pairs[p].norm;
    residual += scaled * scaled;
  }
  const double epsilon = gram_defect(base, pairs, members);
  if (!(epsilon < 0.9)) return {-INFINITY, INFINITY};
  const double rho = 1.001 * std::sqrt(residual), middle = least + (most - least) / 2;
  const double spread = std::max(most - middle, middle - least);
  const double reach = 1.001 * (((1 + epsilon) * spread + std::sqrt(1 + epsilon) * rho) / (1 - epsilon) +
                                rho / std::sqrt(1 - epsilon)) +
                       4 * kUnit * std::fabs(middle);
  return {middle - reach, middle + reach};
}

}  // namespace

double gram_defect(const DefiniteBase& base, const std::vector<ResidualPair>& pairs,
                   const std::vector<std::size_t>& members) {
  const auto k = static_cast<double>(members.size());
  double deviation = 0, stray = 0;
  for (const std::size_t p : members)
    stray = std::max(stray, base.solve_error() * pairs[p].length / pairs[p].norm);
  // Y^T Y - I of the normalised coordinates, entry by entry, with the rounding of a dot product of n terms.
  const double rows = static_cast<double>(base.rows());
  for (const std::size_t p : members) {
    for (const std::size_t q : members) {
      const double product = std::inner_product(pairs[p].coordinates.begin(), pairs[p].coordinates.end(),
                                                pairs[q].coordinates.begin(), 0.0) /
                             (pairs[p].norm * pairs[q].norm);
      const double entry =
          std::fabs(product - (p == q ? 1.0 : 0.0)) + 1.01 * (rows + 8) * kUnit + 4e-6 * (p == q);
      deviation += entry * entry;
    }
  }
  // X^T B X = (Y + H)^T (I + F)(Y + H), every column of Y of norm about 1, of H at most `stray`.
  const double y = std::sqrt(1 + std::sqrt(deviation)), h = std::sqrt(k) * stray;
  return 1.001 * (std::sqrt(deviation) + base.relative() * (y + h) * (y + h) + 2 * y * h + h * h);
}

ResidualWork::ResidualWork(DefiniteBase& base, const ShiftedMatrix& second, bool keep_vectors)
    : base_(base),
      second_(second),
      keep_vectors_(keep_vectors),
      base_size_(absolute_norm(base.matrix(), base.pool())),
      second_size_(absolute_norm(second, base.pool())) {
  const std::size_t size = static_cast<std::size_t>(base.rows()) * kV;
  for (Block* block : {&x_, &bx_, &cx_}) block->resize(size);
}

void ResidualWork::multiply(const double* block) {
  extended_times(base_.matrix(), block, bx_.data(), product_memory_, base_.pool());
  extended_times(second_, block, cx_.data(), product_memory_, base_.pool());
}

std::vector<ResidualPair> ResidualWork::pairs(const std::vector<double>& coordinates, Index count) {
  std::copy(coordinates.begin(), coordinates.end(), x_.begin());
  base_.transposed_solve(x_.data());
  multiply(x_.data());
  ThreadPool& pool = base_.pool();
  const ColumnSums energy = dots(pool, x_, bx_), work = dots(pool, x_, cx_);
  const ColumnSums x_norm = norms(pool, x_), b_norm = norms(pool, bx_), c_norm = norms(pool, cx_);
  ColumnSums theta{};
  for (std::size_t v = 0; v < kV; ++v) theta[v] = energy[v] > 0 ? work[v] / energy[v] : 0;
  Block& z = cx_;  // C x is not needed any more
  for_ranges(pool, static_cast<Offset>(z.size() / kV), kBlockRowsAPiece, [&](Offset begin, Offset end) {
    for (std::size_t i = static_cast<std::size_t>(begin) * kV; i < static_cast<std::size_t>(end) * kV;
         i += kV) {
      for (std::size_t v = 0; v < kV; ++v) z[i + v] -= theta[v] * bx_[i + v];
    }
  });
  const ColumnSums r_norm = norms(pool, z);
  base_.solve(z.data());
  const ColumnSums z_norm = norms(pool, z), y_norm = norms(pool, coordinates);
  std::vector<ResidualPair> pairs(static_cast<std::size_t>(count));
  for (std::size_t v = 0; v < pairs.size(); ++v) {
    ResidualPair& pair = pairs[v];
    const double size = std::fabs(theta[v]);
    // r as computed differs from C x - theta B x by the roundings of both products, of theta times one, of
    // the sum.
    const double rounding = 1.01 * kUnit * (c_norm[v] + 2 * size * b_norm[v] + r_norm[v]) +
                            (second_size_.product_error() + size * base_size_.product_error()) * x_norm[v] +
                            0x1p-500;
    const double shrink = std::sqrt(1 - base_.relative());
    pair.theta = theta[v];
    pair.length = x_norm[v];
    pair.floor = 1.001 * base_.inverse_norm() * (rounding + base_.solve_error() * z_norm[v]);
    pair.residual = 1.001 * (z_norm[v] + pair.floor) / shrink;
    pair.norm = y_norm[v];
    // norms() rounds up: take that off again where a lower bound is needed.
    const double least = shrink * (y_norm[v] / 1.000002 - base_.solve_error() * x_norm[v]);
    pair.radius = least > 0 ? 1.001 * pair.residual / least + 4 * kUnit * size : INFINITY;
    if (!(pair.radius >= 0) || !std::isfinite(pair.radius)) pair.radius = INFINITY;
  }
  pool.run(static_cast<Offset>(pairs.size()), [&](Offset column, int) {
    const auto v = static_cast<std::size_t>(column);
    pairs[v].coordinates = column_of(coordinates, v);
    pairs[v].residual_coordinates = column_of(z, v);
    if (keep_vectors_) pairs[v].vector = column_of(x_, v);
  });
  return pairs;
}

std::vector<EigenvalueGroup> disjoint_groups(const DefiniteBase& base,
                                             const std::vector<ResidualPair>& pairs) {
  std::vector<std::size_t> order;
  for (std::size_t p = 0; p < pairs.size(); ++p) {
    if (std::isfinite(pairs[p].radius)) order.push_back(p);
  }
  std::sort(order.begin(), order.end(),
            [&](std::size_t a, std::size_t b) { return pairs[a].theta < pairs[b].theta; });
  std::vector<EigenvalueGroup> groups;
  for (const std::size_t p : order) {
    EigenvalueGroup group{0, 0, {p}};
    Interval interval = interval_of(base, pairs, group.pairs);
    // A larger group reaches further: join as long as it meets the one below.
    while (!groups.empty() && !(interval.low > groups.back().high)) {
      group.pairs.insert(group.pairs.begin(), groups.back().pairs.begin(), groups.back().pairs.end());
      groups.pop_back();
      interval = interval_of(base, pairs, group.pairs);
    }
    group.low = interval.low;
    group.high = interval.high;
    groups.push_back(std::move(group));
  }
  return groups;
}

std::vector<std::vector<double>> ResidualWork::refined_coordinates(const std::vector<ResidualPair>& pairs) {
  const std::size_t k = pairs.size(), rows = static_cast<std::size_t>(base_.rows());
  // Coordinates after one step of inverse iteration: y + M^-1 r / theta; and the products that Rayleigh and
  // Ritz need.
  std::vector<std::vector<double>> y(k), x(k), bx(k), cx(k);
  const auto in_blocks = [&](const auto& visit) {
    for (std::size_t first = 0; first < k; first += kV) visit(first, std::min(kV, k - first));
  };
  const auto gather = [&](const auto& from, std::size_t first, std::size_t count) {
    std::vector<double> block(rows * kV, 0.0);
    for (std::size_t v = 0; v < count; ++v) {
      for (std::size_t i = 0; i < rows; ++i) block[i * kV + v] = from(first + v)[i];
    }
    return block;
  };
  in_blocks([&](std::size_t first, std::size_t count) {
    std::vector<double> old = gather(
        [&](std::size_t p) -> const auto& { return pairs[p].coordinates; }, first, count);
    base_.transposed_solve(old.data());
    multiply(old.data());
    for (std::size_t i = 0; i < rows; ++i) {
      for (std::size_t v = 0; v < count; ++v) cx_[i * kV + v] -= pairs[first + v].theta * bx_[i * kV + v];
    }
    base_.solve(cx_.data());
    for (std::size_t v = 0; v < count; ++v) {
      const ResidualPair& pair = pairs[first + v];
      y[first + v].resize(rows);
      for (std::size_t i = 0; i < rows; ++i) {
        y[first + v][i] = (pair.coordinates[i] + cx_[i * kV + v] / pair.theta) / pair.norm;
      }
    }
    std::vector<double> fresh = gather(
        [&](std::size_t p) -> const auto& { return y[p]; }, first, count);
    base_.transposed_solve(fresh.data());
    multiply(fresh.data());
    for (std::size_t v = 0; v < count; ++v) {
      x[first + v] = column_of(fresh, v);
      bx[first + v] = column_of(bx_, v);
      cx[first + v] = column_of(cx_, v);
    }
  });
  // Rayleigh and Ritz in the span: energy = V diag(e) V^T, then the work in those coordinates.
  const auto order = static_cast<Index>(k);
  std::vector<double> energy(k * k), work(k * k), energies(k), thetas(k);
  for (std::size_t p = 0; p < k; ++p) {
    for (std::size_t q = 0; q <= p; ++q) {
      energy[p * k + q] = energy[q * k + p] =
          std::inner_product(x[p].begin(), x[p].end(), bx[q].begin(), 0.0);
      work[p * k + q] = work[q * k + p] = std::inner_product(x[p].begin(), x[p].end(), cx[q].begin(), 0.0);
    }
  }
  if (!symmetric_eigen(order, energy, energies) || !(energies.front() > 1e-8 * energies.back())) return y;
  const auto congruent = [&](const std::vector<double>& matrix) {  // E^-1/2 V^T A V E^-1/2
    std::vector<double> result(k * k, 0.0);
    for (std::size_t p = 0; p < k; ++p) {
      std::vector<double> column(k, 0.0);
      for (std::size_t i = 0; i < k; ++i) {
        for (std::size_t j = 0; j < k; ++j) column[i] += matrix[j * k + i] * energy[p * k + j];
      }
      for (std::size_t q = 0; q < k; ++q) {
        double sum = 0;
        for (std::size_t i = 0; i < k; ++i) sum += energy[q * k + i] * column[i];
        result[p * k + q] = sum / std::sqrt(energies[p] * energies[q]);
      }
    }
    return result;
  };
  std::vector<double> rotated = congruent(work);
  if (!symmetric_eigen(order, rotated, thetas)) return y;
  std::vector<std::vector<double>> result(k, std::vector<double>(rows, 0.0));
  for (std::size_t p = 0; p < k; ++p) {
    for (std::size_t q = 0; q < k; ++q) {
      double weight = 0;
      for (std::size_t l = 0; l < k; ++l)
        weight += energy[l * k + q] / std::sqrt(energies[l]) * rotated[p * k + l];
      for (std::size_t i = 0; i < rows; ++i) result[p][i] += weight * y[q][i];
    }
  }
  return result;
}

}  // namespace stanchion
