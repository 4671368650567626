// The kernels for one instruction set in single precision; the flags come from CMakeLists.txt.
#define STANCHION_KERNEL_ISA isa_generic
#define STANCHION_KERNEL_SINGLE
#define STANCHION_KERNEL_NAME "baseline"
#include "dense/kernels_impl.hpp"
