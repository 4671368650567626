#include "dense/blas.hpp"

#include <dlfcn.h>

#include <algorithm>
#include <vector>

extern "C" {
void dgemm_(const char* transa, const char* transb, const int* m, const int* n, const int* k, const double* alpha,
            const double* a, const int* lda, const double* b, const int* ldb, const double* beta, double* c,
            const int* ldc);
}

namespace stanchion {
namespace {

template <class Function>
Function find_symbol(const char* name) {
  return reinterpret_cast<Function>(dlsym(RTLD_DEFAULT, name));
}

/// C = 2^53 everywhere (its neighbours are 2 apart) minus m x n sums of k products -3/4: a product added alone is lost
/// in rounding, a sum formed apart is not. Exact: 2^53 + 3 k / 4 for k a multiple of 8.
bool sums_apart(Index m, Index n, Index k) {
  constexpr double kLarge = 0x1p53;
  const std::vector<double> a(static_cast<std::size_t>(m) * static_cast<std::size_t>(k), 0.75);
  const std::vector<double> b(static_cast<std::size_t>(n) * static_cast<std::size_t>(k), -1.0);
  std::vector<double> c(static_cast<std::size_t>(m) * static_cast<std::size_t>(n), kLarge);
  gemm_nt(m, n, k, -1.0, a.data(), m, b.data(), n, 1.0, c.data(), m);
  const double expected = kLarge + 0.75 * k;
  return std::all_of(c.begin(), c.end(), [&](double entry) { return entry == expected; });
}

bool probe_sums() {
  for (const Index k : {8, 16, 64, 256}) {
    for (Index size = 1; size <= 34; ++size) {
      if (!sums_apart(size, 7, k) || !sums_apart(9, size, k)) return false;
    }
    if (!sums_apart(70, 64, k) || !sums_apart(131, 192, k)) return false;
  }
  return sums_apart(512, 256, 256);
}

}  // namespace

bool products_are_summed_apart() {
  static const bool apart = probe_sums();
  return apart;
}

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
