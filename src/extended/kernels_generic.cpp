// The extended kernels for one instruction set; the flags come from CMakeLists.txt.
#define STANCHION_KERNEL_ISA extended_isa_generic
#define STANCHION_KERNEL_NAME "plain"
#include "extended/kernels_impl.hpp"
