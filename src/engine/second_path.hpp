// The independent path by which `recheck` repeats a claim.
#pragma once

#include "stanchion/request.hpp"

namespace stanchion {

/// `request` with another ordering and another seed.
Request by_second_path(Request request);

/// From now on this process runs the plain kernels, of the factorization in double and in extended precision
/// and of the solves. The BLAS behind large products stays what it is. Call before any other work.
void use_plain_kernels();

}  // namespace stanchion
