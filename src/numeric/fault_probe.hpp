// What is known of A x before the factorization, to tell afterwards whether the machine computed right.
#pragma once

#include <cstdint>

#include "base/buffer.hpp"
#include "sparse/matrix_family.hpp"

namespace stanchion {

/// A vector x of signs and the product A x of the matrix as formed. If P A P^T = L D L^T + E with |E| e <= r,
/// then |A x - P^T L D L^T P x| <= r in every row, for |x_i| = 1: a row beyond that was computed wrongly, by
/// the machine or its memory. An error of one entry is never missed; errors that cancel are, for
/// half the signs. Derivation: src/inertia/error_bound.md, section 9.
struct FaultProbe {
  Buffer<signed char> sign;      ///< +1 or -1 a row, in elimination order
  Buffer<double> product;        ///< A x as computed
  Buffer<double> product_error;  ///< bound on its rounding
  Offset bytes() const {
    return sign.size() * Offset{sizeof(signed char)} +
           (product.size() + product_error.size()) * Offset{sizeof(double)};
  }
};

/// x itself: +1 or -1 a row, keyed by `seed` and `offset`; the same bits on every machine. Throws
/// std::bad_alloc.
Buffer<signed char> draw_signs(Index rows, std::uint64_t seed, double offset);

/// Signs keyed by `seed` and the matrix's offset: the same bits on every machine. Throws std::bad_alloc.
/// Cost: one pass over the entries, half of them by each of two threads of `pool`; the bits are the same.
FaultProbe draw_fault_probe(const ShiftedMatrix& matrix, std::uint64_t seed, ThreadPool* pool = nullptr);

}  // namespace stanchion
