// The block kernels for one instruction set; the flags come from CMakeLists.txt.
#define STANCHION_KERNEL_ISA isa_avx2
#include "numeric/block_kernels_impl.hpp"
