#include "dense/blas.hpp"

#include <dlfcn.h>
#include <sys/mman.h>

#include <algorithm>
#include <mutex>
#include <new>
#include <vector>

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

// OpenBLAS keeps 128 MiB of address space for every thread that is inside a product, and a little to align
// it.
constexpr std::size_t kOpenBlasBytes = std::size_t{136} << 20;

/// Set before there are threads of ours. Setting the number once more would start the library's again.
bool threads_ended = false;

void set_single_threaded() {
  if (const auto set = find_symbol<void (*)(int)>("openblas_set_num_threads")) set(1);
}

/// Whether the system would give so much now, under the limits of the process.
bool there_is_room(std::size_t bytes) {
  void* const place = ::mmap(nullptr, bytes, PROT_READ | PROT_WRITE, MAP_PRIVATE | MAP_ANONYMOUS, -1, 0);
  if (place == MAP_FAILED) return false;
  ::munmap(place, bytes);
  return true;
}

/// Lets OpenBLAS take what `callers` threads need at a time; it keeps that for later products.
void reserve_for(int callers) {
  static std::mutex mutex;
  static int reserved = 0;  // what the library holds, for the whole process
  const auto allocate = find_symbol<void* (*)(int)>("blas_memory_alloc");
  const auto release = find_symbol<void (*)(void*)>("blas_memory_free");
  if (allocate == nullptr || release == nullptr) return;
  const std::lock_guard lock(mutex);
  if (callers <= reserved) return;
  std::vector<void*> held;
  held.reserve(static_cast<std::size_t>(callers));
  while (static_cast<int>(held.size()) < callers) {
    const bool kept = static_cast<int>(held.size()) < reserved;
    if (!kept && !there_is_room(kOpenBlasBytes)) break;
    held.push_back(allocate(0));
  }
  reserved = std::max(reserved, static_cast<int>(held.size()));
  for (void* place : held) release(place);
  if (reserved < callers) throw std::bad_alloc();
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

void use_single_threaded_blas(int callers) {
  if (!threads_ended) set_single_threaded();
  reserve_for(callers);
}

void end_blas_threads() {
  set_single_threaded();
  if (const auto shut_down = find_symbol<int (*)()>("blas_thread_shutdown_")) {
    shut_down();
    threads_ended = true;
  }
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
