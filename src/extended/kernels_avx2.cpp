// The extended kernels for one instruction set; the flags come from CMakeLists.txt.
#define STANCHION_KERNEL_ISA extended_isa_avx2
#define STANCHION_KERNEL_NAME "AVX2"
#include "extended/kernels_impl.hpp"
