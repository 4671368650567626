// What lies near zero in every part: which directions are zero, which are weak, and whether they stand apart.
#pragma once

#include "diagnose/evidence.hpp"

namespace stanchion {

/// Fills `near`: enough vectors of every part that what lies behind the wanted ones is seen. True, and `near`
/// not complete, when something small, but not zero, was found that a smaller offset would tell from what the
/// inertia calls zero, and certifying again is possible.
bool look_near_zero(Evidence& evidence);

/// So many vectors look_near_zero() holds at most, for so many zero directions.
Index most_near_columns(Index zero);

/// Fills `choice` from `near`. Membership is certain when the next eigenvalue is far away, or there is none.
void choose_zero_and_weak(Evidence& evidence);

}  // namespace stanchion
