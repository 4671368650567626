// Dense products from the BLAS at hand, called with one thread: our own workers provide the parallelism.
#pragma once

#include <string>

#include "stanchion/types.hpp"

namespace stanchion {

/// C = alpha A B^T + beta C, column-major; A m x k, B n x k, C m x n. Any summation order over k, no
/// Strassen.
void gemm_nt(Index m, Index n, Index k, double alpha, const double* a, Index lda, const double* b, Index ldb,
             double beta, double* c, Index ldc);

/// C = alpha A B + beta C, column-major; A m x k, B k x n, C m x n.
void gemm_nn(Index m, Index n, Index k, double alpha, const double* a, Index lda, const double* b, Index ldb,
             double beta, double* c, Index ldc);

/// C = alpha A^T B + beta C, column-major; A k x m, B k x n, C m x n.
void gemm_tn(Index m, Index n, Index k, double alpha, const double* a, Index lda, const double* b, Index ldb,
             double beta, double* c, Index ldc);

/// Turns the library's own threads off. Call before the first product. `callers`: how many threads of ours
/// multiply at a time; where the library keeps memory for each of them, it is taken now. Throws
/// std::bad_alloc when there is none: OpenBLAS, refused it in the middle of a product, would ask for ever.
/// Thread safe.
void use_single_threaded_blas(int callers = 1);

/// Ends the threads that OpenBLAS starts when it is loaded, and turns them off for good: they poll for work
/// in the first tens of milliseconds, where the threads of a small job would run. For a program, before it
/// has other threads: not for a library, whose host may multiply meanwhile.
void end_blas_threads();

/// Name, version and kernel of the BLAS in use, as it reports itself.
std::string blas_description();

}  // namespace stanchion
