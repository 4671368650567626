// A matrix product in the order of the reference BLAS: every term is added to the result at once. It takes
// the place of the optimised library's in this test program; the bounds claim to hold for any order of
// summation.
#include <cstddef>

extern "C" void dgemm_(const char* transa, const char* transb, const int* m, const int* n, const int* k,
                       const double* alpha, const double* a, const int* lda, const double* b, const int* ldb,
                       const double* beta, double* c, const int* ldc);

void dgemm_(const char* transa, const char* transb, const int* m, const int* n, const int* k,
            const double* alpha, const double* a, const int* lda, const double* b, const int* ldb,
            const double* beta, double* c, const int* ldc) {
  const auto at = [](const double* base, int row, int column, int leading) {
    return base[static_cast<std::size_t>(column) * static_cast<std::size_t>(leading) +
                static_cast<std::size_t>(row)];
  };
  for (int j = 0; j < *n; ++j) {
    double* column = c + static_cast<std::size_t>(j) * static_cast<std::size_t>(*ldc);
    for (int i = 0; i < *m; ++i) column[i] = *beta == 0 ? 0 : column[i] * *beta;
    for (int l = 0; l < *k; ++l) {
      const double factor = *alpha * (*transb == 'T' ? at(b, j, l, *ldb) : at(b, l, j, *ldb));
      for (int i = 0; i < *m; ++i)
        column[i] += factor * (*transa == 'T' ? at(a, l, i, *lda) : at(a, i, l, *lda));
    }
  }
}
