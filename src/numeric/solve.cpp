#include <algorithm>
#include <cmath>
#include <new>
#include <vector>

#include "dense/blas.hpp"
#include "numeric/factorization.hpp"
#include "sparse/product.hpp"

namespace stanchion {
namespace {

/// The rows of one front gathered from, and put back into, the full vectors.
struct Gathered {
  std::vector<double> pivots, below;  ///< pivots x columns and below x columns, column-major
};

void gather(const FactorFront& front, const double* x, Index rows, Index columns, Gathered& part) {
  const Index p = front.pivots, b = front.order - p;
  part.pivots.resize(static_cast<std::size_t>(p) * static_cast<std::size_t>(columns));
  part.below.resize(static_cast<std::size_t>(b) * static_cast<std::size_t>(columns));
  for (Index c = 0; c < columns; ++c) {
    const double* column = x + Offset{c} * rows;
    for (Index i = 0; i < p; ++i)
      part.pivots[static_cast<std::size_t>(Offset{c} * p + i)] = column[front.position[i]];
    for (Index i = 0; i < b; ++i)
      part.below[static_cast<std::size_t>(Offset{c} * b + i)] = column[front.position[p + i]];
  }
}

void forward(const FactorFront& front, double* x, Index rows, Index columns, Gathered& part) {
  const Index p = front.pivots, b = front.order - p, m = front.order;
  gather(front, x, rows, columns, part);
  for (Index c = 0; c < columns; ++c) {
    double* v = part.pivots.data() + Offset{c} * p;
    for (Index k = 0; k < p; ++k) {
      const double* lower = front.lower.data() + Offset{k} * m;
      for (Index i = k + 1; i < p; ++i) v[i] -= lower[i] * v[k];
    }
  }
  if (b > 0) {
    gemm_nn(b, columns, p, -1.0, front.lower.data() + p, m, part.pivots.data(), p, 1.0, part.below.data(), b);
  }
  for (Index c = 0; c < columns; ++c) {
    double* column = x + Offset{c} * rows;
    for (Index i = 0; i < p; ++i)
      column[front.position[i]] = part.pivots[static_cast<std::size_t>(Offset{c} * p + i)];
    for (Index i = 0; i < b; ++i)
      column[front.position[p + i]] = part.below[static_cast<std::size_t>(Offset{c} * b + i)];
  }
}

Status divide(const FactorFront& front, double* x, Index rows, Index columns) {
  for (Index k = 0; k < front.pivots; ++k) {
    if (front.kind[k] == PivotKind::kZero) {
      return {StatusKind::kBadInput, "singular", "a pivot is exactly zero: the system has no unique solution",
              "", ""};
    }
    for (Index c = 0; c < columns; ++c) {
      double* column = x + Offset{c} * rows;
      double& first = column[front.position[k]];
      if (front.kind[k] == PivotKind::kOne) {
        first /= front.diagonal[k];
      } else if (front.kind[k] == PivotKind::kTwoFirst) {
        double& second = column[front.position[k + 1]];
        const double b = front.off_diagonal[k], ab = front.diagonal[k] / b, cb = front.diagonal[k + 1] / b;
        const double inverse = 1 / (b * (ab * cb - 1)), f = first, g = second;
        first = (cb * f - g) * inverse;
        second = (ab * g - f) * inverse;
      }
    }
  }
  return {};
}

void backward(const FactorFront& front, double* x, Index rows, Index columns, Gathered& part) {
  const Index p = front.pivots, b = front.order - p, m = front.order;
  gather(front, x, rows, columns, part);
  if (b > 0) {
    gemm_tn(p, columns, b, -1.0, front.lower.data() + p, m, part.below.data(), b, 1.0, part.pivots.data(), p);
  }
  for (Index c = 0; c < columns; ++c) {
    double* v = part.pivots.data() + Offset{c} * p;
    for (Index k = p; k-- > 0;) {
      const double* lower = front.lower.data() + Offset{k} * m;
      double sum = 0;
      for (Index i = k + 1; i < p; ++i) sum += lower[i] * v[i];
      v[k] -= sum;
    }
    double* column = x + Offset{c} * rows;
    for (Index i = 0; i < p; ++i) column[front.position[i]] = v[i];
  }
}

}  // namespace

namespace {

Status solve_or_throw(const Factor& factor, double* x, Index columns) {
  Gathered part;
  for (const FactorFront& front : factor.fronts) {
    if (!front.lower_single.empty()) return Status::internal("solve() needs L in double precision");
  }
  for (const FactorFront& front : factor.fronts) forward(front, x, factor.rows, columns, part);
  for (const FactorFront& front : factor.fronts) {
    if (Status divided = divide(front, x, factor.rows, columns); !divided.ok()) return divided;
  }
  for (std::size_t f = factor.fronts.size(); f-- > 0;)
    backward(factor.fronts[f], x, factor.rows, columns, part);
  return {};
}

Status solve_refined_or_throw(const Factor& factor, const ShiftedMatrix& matrix, std::span<const double> b,
                              std::span<double> x, int most_steps, double* backward_error) {
  const auto n = static_cast<std::size_t>(factor.rows);
  std::vector<double> residual(b.begin(), b.end()), product(n), size(n), best(n);
  std::fill(x.begin(), x.end(), 0.0);
  double error = INFINITY;
  for (int step = 0; step <= most_steps; ++step) {
    if (Status solved = solve_or_throw(factor, residual.data(), 1); !solved.ok()) return solved;
    for (std::size_t i = 0; i < n; ++i) x[i] += residual[i];
    multiply(matrix, x, product);
    std::vector<double> absolute(n);
    for (std::size_t i = 0; i < n; ++i) absolute[i] = std::fabs(x[i]);
    multiply_absolute(matrix, absolute, size);
    double now = 0;
    for (std::size_t i = 0; i < n; ++i) {
      residual[i] = b[i] - product[i];
      const double scale = size[i] + std::fabs(b[i]);
      if (scale > 0) now = std::max(now, std::fabs(residual[i]) / scale);
    }
    if (!(now < error / 2)) {
      if (now < error) {
        error = now;
        std::copy(x.begin(), x.end(), best.begin());
      }
      break;
    }
    error = now;
    std::copy(x.begin(), x.end(), best.begin());
  }
  std::copy(best.begin(), best.end(), x.begin());
  *backward_error = error;
  return {};
}

Status no_memory() {
  return Status::resource_limit("out-of-memory", "the system has no more memory for a solve", "",
                                "free memory");
}

}  // namespace

Status solve(const Factor& factor, double* x, Index columns) {
  try {
    return solve_or_throw(factor, x, columns);
  } catch (const std::bad_alloc&) {
    return no_memory();
  }
}

Status solve_refined(const Factor& factor, const ShiftedMatrix& matrix, std::span<const double> b,
                     std::span<double> x, int most_steps, double* backward_error) {
  try {
    return solve_refined_or_throw(factor, matrix, b, x, most_steps, backward_error);
  } catch (const std::bad_alloc&) {
    return no_memory();
  }
}

}  // namespace stanchion
