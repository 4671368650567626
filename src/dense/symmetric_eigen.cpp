#include "dense/symmetric_eigen.hpp"

#include <algorithm>
#include <cmath>
#include <vector>

#include "dense/blas.hpp"

extern "C" {
void dsyevd_(const char* job, const char* triangle, const int* n, double* a, const int* lda, double* w,
             double* work, const int* lwork, int* iwork, const int* liwork, int* info);
}

namespace stanchion {

bool symmetric_eigen(Index n, std::span<double> matrix, std::span<double> values) {
  if (n == 0) return true;
  if (!std::all_of(matrix.begin(), matrix.end(), [](double entry) { return std::isfinite(entry); }))
    return false;
  use_single_threaded_blas();
  const int order = n, size = 1 + 6 * n + 2 * n * n, whole = 3 + 5 * n;
  std::vector<double> work(static_cast<std::size_t>(size));
  std::vector<int> integer_work(static_cast<std::size_t>(whole));
  int info = 0;
  dsyevd_("V", "L", &order, matrix.data(), &order, values.data(), work.data(), &size, integer_work.data(),
          &whole, &info);
  return info == 0;
}

}  // namespace stanchion
