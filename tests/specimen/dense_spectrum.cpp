#include "specimen/dense_spectrum.hpp"

#include <Eigen/Eigenvalues>
#include <Eigen/Sparse>
#include <Eigen/SparseCholesky>
#include <algorithm>
#include <cmath>

namespace stanchion::testing {
namespace {

Eigen::SparseMatrix<double> sparse(const SymmetricMatrix& matrix) {
  std::vector<Eigen::Triplet<double>> entries;
  for (Index column = 0; column < matrix.rows; ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      entries.emplace_back(matrix.row[k], column, matrix.value[k]);
      if (matrix.row[k] != column) entries.emplace_back(column, matrix.row[k], matrix.value[k]);
    }
  }
  Eigen::SparseMatrix<double> full(matrix.rows, matrix.rows);
  full.setFromTriplets(entries.begin(), entries.end());
  return full;
}

}  // namespace

Eigen::MatrixXd dense(const SymmetricMatrix& matrix) {
  Eigen::MatrixXd full = Eigen::MatrixXd::Zero(matrix.rows, matrix.rows);
  for (Index column = 0; column < matrix.rows; ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      full(matrix.row[k], column) = full(column, matrix.row[k]) = matrix.value[k];
    }
  }
  return full;
}

Eigen::MatrixXd scaled(const Eigen::MatrixXd& a) {
  Eigen::VectorXd s(a.rows());
  for (Eigen::Index i = 0; i < a.rows(); ++i) s(i) = a(i, i) == 0 ? 1 : 1 / std::sqrt(std::abs(a(i, i)));
  return s.asDiagonal() * a * s.asDiagonal();
}

Eigen::VectorXd eigenvalues(const Eigen::MatrixXd& a) {
  return Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd>(a, Eigen::EigenvaluesOnly).eigenvalues();
}

SignCount signs(const Eigen::MatrixXd& a, double resolution) {
  SignCount count;
  for (const double value : eigenvalues(scaled(a))) {
    ++(value < -resolution ? count.negative : value > resolution ? count.positive : count.zero);
  }
  return count;
}

std::vector<double> critical_factors(const Eigen::MatrixXd& k, const Eigen::MatrixXd& g) {
  const std::vector<double> inverse = pencil_values(-g, k);
  const double largest = std::max(std::abs(inverse.front()), std::abs(inverse.back()));
  std::vector<double> factors;
  for (const double mu : inverse) {
    if (mu > 1e-10 * largest) factors.push_back(1 / mu);
  }
  std::sort(factors.begin(), factors.end());
  return factors;
}

std::vector<double> pencil_values(const Eigen::MatrixXd& k, const Eigen::MatrixXd& m) {
  const Eigen::GeneralizedSelfAdjointEigenSolver<Eigen::MatrixXd> solver(k, m, Eigen::EigenvaluesOnly);
  return {solver.eigenvalues().begin(), solver.eigenvalues().end()};
}

std::vector<double> lowest_values_of(const SymmetricMatrix& k, const SymmetricMatrix& b, int wanted,
                                     double sign_of_b) {
  const Eigen::SparseMatrix<double> left = sparse(k), right = sign_of_b * sparse(b);
  const Eigen::SimplicialLLT<Eigen::SparseMatrix<double>> factor(left);
  const Eigen::Index width = std::min<Eigen::Index>(k.rows, 2 * wanted + 6);
  Eigen::MatrixXd x(k.rows, width);
  for (Eigen::Index i = 0; i < x.rows(); ++i) {
    for (Eigen::Index j = 0; j < width; ++j)
      x(i, j) = std::sin(1.0 + static_cast<double>(i * (2 * j + 3) + j * j));
  }
  std::vector<double> values(static_cast<std::size_t>(wanted), 0);
  for (int step = 0; step < 200; ++step) {
    const Eigen::MatrixXd y = factor.solve(right * x);
    const Eigen::MatrixXd stiff = y.transpose() * (left * y), load = y.transpose() * (right * y);
    const Eigen::GeneralizedSelfAdjointEigenSolver<Eigen::MatrixXd> small(load, stiff);
    std::vector<Eigen::Index> order(static_cast<std::size_t>(width));
    for (std::size_t i = 0; i < order.size(); ++i) order[i] = static_cast<Eigen::Index>(i);
    std::stable_sort(order.begin(), order.end(), [&](Eigen::Index p, Eigen::Index q) {
      return std::abs(small.eigenvalues()(p)) > std::abs(small.eigenvalues()(q));
    });
    double change = 0;
    for (std::size_t i = 0; i < values.size(); ++i) {
      const double value = 1 / small.eigenvalues()(order[i]);
      change = std::max(change, std::abs(value - values[i]) / std::abs(value));
      values[i] = value;
    }
    x = y * small.eigenvectors();
    if (change < 1e-12) break;
  }
  return values;
}

}  // namespace stanchion::testing
