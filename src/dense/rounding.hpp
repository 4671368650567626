// What the proofs and the pivot choice need to know of a scalar.
#pragma once

namespace stanchion {

/// Constants of a binary format, round to nearest, with gradual underflow. See src/inertia/error_bound.md.
template <class Scalar>
struct Rounding;

template <>
struct Rounding<double> {
  static constexpr double kUnit = 0x1p-53;
  /// Pivots below this are never divided by: their reciprocal could overflow. In a scaled matrix they are
  /// noise.
  static constexpr double kLeastPivot = 0x1p-900;
  /// A row of a front loses at most this, times the order and the largest pivot, to underflow.
  static constexpr double kUnderflow = 0x1p-1060;
  static constexpr double kLeast = 0x1p-1074;  ///< smallest positive number
};

template <>
struct Rounding<float> {
  static constexpr double kUnit = 0x1p-24;
  static constexpr double kLeastPivot = 0x1p-60;
  static constexpr double kUnderflow = 0x1p-135;
  static constexpr double kLeast = 0x1p-149;
};

}  // namespace stanchion
