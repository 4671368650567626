// Checked crossings between index widths, and checked products of counts.
#pragma once

#include <limits>
#include <optional>

#include "stanchion/types.hpp"

namespace stanchion {

/// `value` as an Index, or nothing when it does not fit.
inline std::optional<Index> to_index(Offset value) {
  if (value < 0 || value > std::numeric_limits<Index>::max()) return std::nullopt;
  return static_cast<Index>(value);
}

/// `a * b` as an Offset, or nothing on overflow.
inline std::optional<Offset> checked_product(Offset a, Offset b) {
  Offset product = 0;
  if (__builtin_mul_overflow(a, b, &product)) return std::nullopt;
  return product;
}

}  // namespace stanchion
