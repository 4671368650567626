// Dense eigenvalues of small specimens and element matrices: the reference that everything here is held
// against.
#pragma once

#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <vector>

#include "sparse/symmetric_matrix.hpp"
#include "specimen/element_matrix.hpp"

namespace stanchion::testing {

inline Eigen::MatrixXd dense(const SymmetricMatrix& matrix) {
  Eigen::MatrixXd full = Eigen::MatrixXd::Zero(matrix.rows, matrix.rows);
  for (Index column = 0; column < matrix.rows; ++column) {
    for (Offset k = matrix.column_start[column]; k < matrix.column_start[Offset{column} + 1]; ++k) {
      full(matrix.row[k], column) = full(column, matrix.row[k]) = matrix.value[k];
    }
  }
  return full;
}

template <int n>
Eigen::MatrixXd dense(const specimen::ElementMatrix<n>& matrix) {
  Eigen::MatrixXd full(n, n);
  for (int i = 0; i < n; ++i) {
    for (int j = 0; j < n; ++j) full(i, j) = matrix(i, j);
  }
  return full;
}

/// S A S with S = diag(|a_ii|)^-1/2 (1 where a_ii = 0): the same inertia, without the mixed units.
inline Eigen::MatrixXd scaled(const Eigen::MatrixXd& a) {
  Eigen::VectorXd s(a.rows());
  for (Eigen::Index i = 0; i < a.rows(); ++i) s(i) = a(i, i) == 0 ? 1 : 1 / std::sqrt(std::abs(a(i, i)));
  return s.asDiagonal() * a * s.asDiagonal();
}

inline Eigen::VectorXd eigenvalues(const Eigen::MatrixXd& a) {
  return Eigen::SelfAdjointEigenSolver<Eigen::MatrixXd>(a, Eigen::EigenvaluesOnly).eigenvalues();
}

struct SignCount {
  Index negative = 0, zero = 0, positive = 0;
  bool operator==(const SignCount&) const = default;
};

/// Eigenvalues of the scaled matrix by sign; zero means within `resolution`.
inline SignCount signs(const Eigen::MatrixXd& a, double resolution) {
  SignCount count;
  for (const double value : eigenvalues(scaled(a))) {
    ++(value < -resolution ? count.negative : value > resolution ? count.positive : count.zero);
  }
  return count;
}

/// Critical factors f of K + f G, K positive definite, ascending by magnitude, those of positive sign only:
/// -G x = mu K x with mu = 1 / f.
inline std::vector<double> critical_factors(const Eigen::MatrixXd& k, const Eigen::MatrixXd& g) {
  const Eigen::GeneralizedSelfAdjointEigenSolver<Eigen::MatrixXd> solver(-g, k, Eigen::EigenvaluesOnly);
  std::vector<double> factors;
  const double largest = solver.eigenvalues().cwiseAbs().maxCoeff();
  for (const double mu : solver.eigenvalues()) {
    if (mu > 1e-10 * largest) factors.push_back(1 / mu);
  }
  std::sort(factors.begin(), factors.end());
  return factors;
}

/// Eigenvalues s of K - s M, M positive definite, ascending.
inline std::vector<double> pencil_values(const Eigen::MatrixXd& k, const Eigen::MatrixXd& m) {
  const Eigen::GeneralizedSelfAdjointEigenSolver<Eigen::MatrixXd> solver(k, m, Eigen::EigenvaluesOnly);
  return {solver.eigenvalues().begin(), solver.eigenvalues().end()};
}

}  // namespace stanchion::testing
