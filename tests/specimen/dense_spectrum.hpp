// Dense eigenvalues of small specimens and element matrices: the reference that everything here is held
// against.
#pragma once

#include <Eigen/Core>
#include <Eigen/LU>
#include <vector>

#include "sparse/symmetric_matrix.hpp"
#include "specimen/element_matrix.hpp"

namespace stanchion::testing {

Eigen::MatrixXd dense(const SymmetricMatrix& matrix);

template <int n>
Eigen::MatrixXd dense(const specimen::ElementMatrix<n>& matrix) {
  Eigen::MatrixXd full(n, n);
  for (int i = 0; i < n; ++i) {
    for (int j = 0; j < n; ++j) full(i, j) = matrix(i, j);
  }
  return full;
}

/// S A S with S = diag(|a_ii|)^-1/2 (1 where a_ii = 0): the same inertia, without the mixed units.
Eigen::MatrixXd scaled(const Eigen::MatrixXd& a);

/// All eigenvalues, ascending.
Eigen::VectorXd eigenvalues(const Eigen::MatrixXd& a);

struct SignCount {
  Index negative = 0, zero = 0, positive = 0;
};

/// Eigenvalues of the scaled matrix by sign; zero means within `resolution`.
SignCount signs(const Eigen::MatrixXd& a, double resolution);

/// Critical factors f > 0 of K + f G, K positive definite, ascending: -G x = mu K x with mu = 1 / f.
std::vector<double> critical_factors(const Eigen::MatrixXd& k, const Eigen::MatrixXd& g);

/// Eigenvalues s of K - s M, M positive definite, ascending.
std::vector<double> pencil_values(const Eigen::MatrixXd& k, const Eigen::MatrixXd& m);

/// The `wanted` values v smallest in magnitude of K x = v b B x, K positive definite, B symmetric (b B = -G
/// for the critical factors of K + f G, M for the squared frequencies), by subspace iteration to a relative
/// change of 1e-12: for meshes too fine for dense eigenvalues.
std::vector<double> lowest_values_of(const SymmetricMatrix& k, const SymmetricMatrix& b, int wanted,
                                     double sign_of_b);

}  // namespace stanchion::testing
