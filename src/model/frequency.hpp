// Frequencies: s = omega^2 = (2 pi f)^2, keeping the sign.
#pragma once

#include "stanchion/request.hpp"

namespace stanchion {

/// f in hertz of s = omega^2; negative for negative s.
double hertz_of(double s);

/// A value in `unit` as a shift of the pencil.
double shift_of(double value, ValueUnit unit);

}  // namespace stanchion
