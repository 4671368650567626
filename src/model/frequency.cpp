#include "model/frequency.hpp"

#include <cmath>
#include <numbers>

namespace stanchion {

double hertz_of(double s) {
  return std::copysign(std::sqrt(std::fabs(s)) / (2 * std::numbers::pi), s);
}

double shift_of(double value, ValueUnit unit) {
  if (unit != ValueUnit::kHertz) return value;
  const double omega = 2 * std::numbers::pi * value;
  return std::copysign(omega * omega, value);
}

}  // namespace stanchion
