// Threads of the BLAS itself, which are all the parallelism a sequential solver has.
#pragma once

extern "C" void openblas_set_num_threads(int threads);
