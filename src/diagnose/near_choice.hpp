// What lies near zero in every part: which directions are zero, which are weak, and whether they stand apart.
#pragma once

#include "diagnose/evidence.hpp"

namespace stanchion {

/// Fills `near`: enough vectors of every part that what lies behind the wanted ones is seen.
void look_near_zero(Evidence& evidence);

/// Small, but not zero: whether another offset would tell apart what the inertia calls zero.
bool wants_sharper_offset(const Evidence& evidence);

/// Fills `choice` from `near`. Membership is certain when the next eigenvalue is far away, or there is none.
void choose_zero_and_weak(Evidence& evidence);

}  // namespace stanchion
