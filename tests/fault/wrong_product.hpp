// Products that go wrong on request: a dgemm_ that takes the place of the library's in a test program, and a
// set of kernels around the best of ours.
#pragma once

#include <cstdint>

#include "dense/kernels.hpp"

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

/// The best kernels of this processor with products that can be spoiled; for use_kernels().
const Kernels& spoiled_kernels();

/// From now on nothing goes wrong. Returns the number of calls since the last of either.
std::int64_t mend_product();

}  // namespace stanchion::test
