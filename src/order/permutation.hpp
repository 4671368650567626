// Permutations as arrays of indices.
#pragma once

#include "base/buffer.hpp"
#include "stanchion/types.hpp"

namespace stanchion {

/// inverse[permutation[k]] = k. Cost: one pass.
inline Buffer<Index> inverse_of(const Buffer<Index>& permutation) {
  Buffer<Index> inverse(permutation.size());
  for (Offset k = 0; k < permutation.size(); ++k) inverse[permutation[k]] = static_cast<Index>(k);
  return inverse;
}

}  // namespace stanchion
