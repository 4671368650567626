// Dense eigenvalues by LAPACK: the oracle for everything small.
#pragma once

#include <algorithm>
#include <vector>

#include "sparse/symmetric_matrix.hpp"

extern "C" void dsyev_(const char* jobz, const char* uplo, const int* n, double* a, const int* lda, double* w,
                       double* work, const int* lwork, int* info);

namespace stanchion::test {

/// Column-major full copy.
inline std::vector<double> to_dense(const SymmetricMatrix& matrix) {
  const auto n = static_cast<std::size_t>(matrix.rows);
  std::vector<double> full(n * n, 0.0);
  for (Index j = 0; j < matrix.rows; ++j) {
    for (Offset k = matrix.column_start[j]; k < matrix.column_start[Offset{j} + 1]; ++k) {
      const auto i = static_cast<std::size_t>(matrix.row[k]), jj = static_cast<std::size_t>(j);
      full[i + jj * n] = full[jj + i * n] = matrix.value[k];
    }
  }
  return full;
}

/// Ascending eigenvalues of a full symmetric matrix.
inline std::vector<double> eigenvalues(std::vector<double> full, int n) {
  std::vector<double> values(static_cast<std::size_t>(n)),
      work(static_cast<std::size_t>(std::max(1, 34 * n)));
  const int lwork = static_cast<int>(work.size());
  int info = 0;
  dsyev_("N", "L", &n, full.data(), &n, values.data(), work.data(), &lwork, &info);
  return values;
}

inline std::vector<double> eigenvalues(const SymmetricMatrix& matrix) {
  return eigenvalues(to_dense(matrix), matrix.rows);
}

}  // namespace stanchion::test
