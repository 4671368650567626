// What this run stands on: processors, BLAS, instruction set, memory of the process.
#pragma once

#include "stanchion/outcome.hpp"

namespace stanchion {

HostRecord describe_host();

/// Resident memory of this process now, and its peak so far, in bytes (Linux: VmRSS and VmHWM); 0 if unknown.
Offset resident_bytes();
Offset peak_resident_bytes();

/// Memory of this machine.
Offset total_memory_bytes();

}  // namespace stanchion
