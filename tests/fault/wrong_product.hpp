// A dgemm_ that takes the place of the library's in a test program and computes one product wrongly on
// request.
#pragma once

#include <cstdint>

namespace stanchion::test {

enum class Wrong {
  kNothing,
  kDroppedTerm,  ///< one entry of the product misses one of its terms
  kNudged,       ///< one entry is off by a relative 2^-20
  kShifted,      ///< one entry is off by 2^-30 of one
  kFlippedBit,   ///< one bit of one entry is flipped
};

/// From now on call number `call` (from 0) goes wrong, at a place drawn from `seed`; every call when
/// `always`.
void spoil_product(Wrong wrong, std::int64_t call, std::uint64_t seed, bool always = false);

/// From now on nothing goes wrong. Returns the number of calls since the last of either.
std::int64_t mend_product();

}  // namespace stanchion::test
