#include "dense/blas.hpp"

#include <dlfcn.h>

extern "C" {
void dgemm_(const char* transa, const char* transb, const int* m, const int* n, const int* k,
            const double* alpha, const double* a, const int* lda, const double* b, const int* ldb,
            const double* beta, double* c, const int* ldc);
}

namespace stanchion {
namespace {

template <class Function>
Function find_symbol(const char* name) {
  return reinterpret_cast<Function>(dlsym(RTLD_DEFAULT, name));
}

}  // namespace

void gemm_nt(Index m, Index n, Index k, double alpha, const double* a, Index lda, const double* b, Index ldb,
             double beta, double* c, Index ldc) {
  dgemm_("N", "T", &m, &n, &k, &alpha, a, &lda, b, &ldb, &beta, c, &ldc);
}

void gemm_nn(Index m, Index n, Index k, double alpha, const double* a, Index lda, const double* b, Index ldb,
             double beta, double* c, Index ldc) {
  dgemm_("N", "N", &m, &n, &k, &alpha, a, &lda, b, &ldb, &beta, c, &ldc);
}

void gemm_tn(Index m, Index n, Index k, double alpha, const double* a, Index lda, const double* b, Index ldb,
             double beta, double* c, Index ldc) {
  dgemm_("T", "N", &m, &n, &k, &alpha, a, &lda, b, &ldb, &beta, c, &ldc);
}

void use_single_threaded_blas() {
  if (auto set = find_symbol<void (*)(int)>("openblas_set_num_threads")) set(1);
}

std::string blas_description() {
  if (auto config = find_symbol<char* (*)()>("openblas_get_config")) {
    std::string text = config();
    if (auto core = find_symbol<char* (*)()>("openblas_get_corename")) {
      if (text.find(core()) == std::string::npos) text += std::string(" ") + core();
    }
    return text;
  }
  return "BLAS through the standard interface (no self-description)";
}

}  // namespace stanchion
