// What the operating system says this process has used.
#pragma once

#include "stanchion/types.hpp"

namespace stanchion::bench {

/// User plus system seconds of all threads since the process started.
double processor_seconds();

/// Resident memory now (VmRSS) and at its highest since the start or reset_highest_resident() (VmHWM).
Offset resident_bytes();
Offset highest_resident_bytes();

/// Gives free heap pages back and lowers VmHWM to VmRSS, so that each repetition has its own peak.
void reset_highest_resident();

}  // namespace stanchion::bench
