// Whom to suspect when two things that are both proved contradict each other, in every message alike.
#pragma once

namespace stanchion {

/// Our own kernels make every factor; the BLAS serves estimates, which are held against the matrix
/// afterwards.
inline constexpr const char* kMachineOrProgram = "a fault of the machine, its memory, or the program";

}  // namespace stanchion
